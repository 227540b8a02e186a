package report

import (
	"encoding/json"
	"fmt"
	"html/template"
	"math"
	"strconv"
	"strings"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"dieaway/decay/quantity"
)

// A panel is one of the coordinate systems that stand below each other and share
// their time axis.
type panel struct {
	Title   string `json:"title"`
	Caption string `json:"-"`
	Unit    string `json:"unit"`
	Log     bool   `json:"log"`
	Keys    []key  `json:"-"`
}

// A key is one entry of the legend; it switches the series of its name.
type key struct {
	Name string
	// Mark is how it is drawn (line, dash, dots, ring, cross, band), Color the
	// name of its colour in the style sheet.
	Mark, Color string
}

// A view is a stretch of time that the page offers to zoom to.
type view struct {
	Name string `json:"name"`
	From number `json:"from"`
	To   number `json:"to"`
}

// A figure is all the page needs to draw: the option of the charts and what the
// script has to know beside it.
type figure struct {
	Option  json.RawMessage `json:"option"`
	Time    string          `json:"time"` // unit of the common axis
	Panels  []panel         `json:"panels"`
	Views   []view          `json:"views"`
	Name    string          `json:"name"` // for the title of an exported picture
	Reduced bool            `json:"reduced"`
	Picture string          `json:"picture,omitempty"` // file name of an exported picture
	Dates   bool            `json:"dates,omitempty"`   // the common axis is of dates
	Bare    bool            `json:"bare,omitempty"`    // no outline of the first curve in the bar that zooms
	Fill    []fill          `json:"fill,omitempty"`    // data sets that come from the rows of the page
	// Logarithmic says that the common axis holds logarithms to the base of ten.
	Logarithmic bool `json:"logarithmic,omitempty"`
	// Whole says that all of it is shown at first, however narrow the first view.
	Whole bool `json:"whole,omitempty"`

	// Names are of the places 1, 2, ... of the common axis.
	Names []string `json:"names,omitempty"`
	// Low says that the charts need little height.
	Low bool `json:"low,omitempty"`

	// Words are those of the tools, Notes the sentences below the charts.
	Words axisWords `json:"-"`
	Notes []string  `json:"-"`
	// Suffix tells the figures of a page apart, Data is the figure as JSON.
	Suffix string      `json:"-"`
	Data   template.JS `json:"-"`
}

// axisWords are what the tools of a figure call its common axis.
type axisWords struct{ X, Shown, Whole, Left, Right string }

var (
	wordsOfTime      = axisWords{"time", "Time shown in all charts", "Whole record", "Earlier", "Later"}
	wordsOfFrequency = axisWords{"frequency", "Frequencies shown in all charts", "Whole sweep", "Lower", "Higher"}
)

// A column is numbers of a data set, rounded to what a screen can show; NaN is null.
type column struct {
	values  []float64
	factor  float64
	places  int // digits behind the point
	leading int // or, when greater, significant digits
}

// MarshalJSON writes an array of numbers.
func (c column) MarshalJSON() ([]byte, error) {
	b := make([]byte, 0, 9*len(c.values)+2)
	b = append(b, '[')
	for i, v := range c.values {
		if i > 0 {
			b = append(b, ',')
		}
		switch v *= c.factor; {
		case math.IsNaN(v) || math.IsInf(v, 0):
			b = append(b, "null"...)
		case c.leading > 0:
			b = strconv.AppendFloat(b, v, 'g', c.leading, 64)
		default:
			b = strconv.AppendFloat(b, round(v, c.places), 'f', -1, 64)
		}
	}
	return append(b, ']'), nil
}

// round rounds to places digits behind the point; zero has no sign.
func round(v float64, places int) float64 {
	p := math.Pow10(places)
	if r := math.Round(v*p) / p; r != 0 && !math.IsInf(r, 0) {
		return r
	}
	return 0
}

// A plot builds the figure of one ring-down.
type plot struct {
	*charts.Line
	time, level axisScale
	panels      []panel
	datasets    int
}

// An axisScale says how the numbers along an axis are written.
type axisScale struct {
	factor float64
	unit   string
	places int
}

// scaleFor returns the scale for numbers from lo to hi that are told apart down to step.
func scaleFor(lo, hi, step float64, unit string) axisScale {
	s := axisScale{places: 3}
	most := math.Max(math.Abs(lo), math.Abs(hi))
	if s.factor, s.unit = quantity.Scale(most, unit); s.factor == 1 {
		s.factor, s.unit = powers(most, s.unit)
	}
	if step > 0 {
		s.places = max(0, min(15, int(math.Ceil(-math.Log10(step*s.factor)))))
	}
	return s
}

// powers scales by a power of a thousand, named in the unit, what has no prefix
// and would need many zeros.
func powers(most float64, unit string) (factor float64, scaled string) {
	if !(most > 0) || math.IsInf(most, 0) || most >= 0.01 && most < 1e5 {
		return 1, unit
	}
	p := 3 * int(math.Floor(math.Log10(most)/3))
	return math.Pow10(-p), strings.TrimSpace("×10" + superscript(p) + " " + unit)
}

func superscript(n int) string {
	return strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴",
		"5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹").Replace(strconv.Itoa(n))
}

func (s axisScale) column(v []float64) column {
	return column{values: v, factor: s.factor, places: s.places}
}

// addData adds a data set of named columns and returns its number.
func (p *plot) addData(columns map[string]column) int {
	p.AddDataset(opts.Dataset{Source: columns})
	p.datasets++
	return p.datasets - 1
}

// addSeries adds a series to the last panel, and a key when it is the first of its name.
func (p *plot) addSeries(k key, kind string, data int, y string, more ...charts.SeriesOpts) {
	index := len(p.panels) - 1
	last := &p.panels[index]
	known := false
	for _, other := range last.Keys {
		known = known || other.Name == k.Name
	}
	if !known {
		last.Keys = append(last.Keys, k)
	}
	style := charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		s.Type, s.Id = kind, fmt.Sprintf("s%d", len(p.MultiSeries))
		s.XAxisIndex, s.YAxisIndex, s.DatasetIndex = index, index, data
		s.Encode = &opts.Encode{X: "t", Y: y}
		s.ShowSymbol, s.Data = opts.Bool(false), nil
		s.LineStyle = &opts.LineStyle{Color: "@" + k.Color, Width: 1.8}
		s.ItemStyle = &opts.ItemStyle{Color: "@" + k.Color}
		switch k.Mark {
		case "dash":
			s.LineStyle.Type = "dashed"
		case "dots":
			s.LineStyle.Width, s.LineStyle.Opacity = 1, opts.Float(0.45)
			s.SymbolSize = 3
		case "ring":
			s.Symbol, s.SymbolSize = "circle", 7
			s.ItemStyle = &opts.ItemStyle{Color: "transparent", BorderColor: "@" + k.Color, BorderWidth: 1.4}
		case "cross":
			s.Symbol, s.SymbolSize = "diamond", 7
		}
	})
	p.AddSeries(k.Name, nil, append([]charts.SeriesOpts{style}, more...)...)
}

// addPanel begins a panel.
func (p *plot) addPanel(title, caption, unit string, log bool) {
	index := len(p.panels)
	p.panels = append(p.panels, panel{Title: title, Caption: caption, Unit: unit, Log: log})
	kind := "value"
	if log {
		kind = "log"
	}
	x := opts.XAxis{Type: "value", GridIndex: index, Name: p.time.unit}
	y := opts.YAxis{Type: kind, GridIndex: index, Name: unit, Scale: opts.Bool(true)}
	if index > 0 {
		p.ExtendXAxis(x)
		p.ExtendYAxis(y)
	} else {
		p.SetGlobalOptions(charts.WithXAxisOpts(x), charts.WithYAxisOpts(y))
	}
	p.SetGlobalOptions(charts.WithGridOpts(opts.Grid{}))
}

// finish turns the plot into the option of the page.
func (p *plot) finish(lo, hi float64, description string) (json.RawMessage, error) {
	axes, names := []int{}, []string{}
	for i := range p.panels {
		axes = append(axes, i)
		p.XAxisList[i].Min = round(lo*p.time.factor, p.time.places)
		p.XAxisList[i].Max = round(hi*p.time.factor, p.time.places)
	}
	for _, s := range p.MultiSeries {
		names = append(names, s.Name)
	}
	p.SetGlobalOptions(
		charts.WithAnimation(false),
		charts.WithLegendOpts(opts.Legend{Show: opts.Bool(false), Data: names}),
		charts.WithTooltipOpts(opts.Tooltip{Show: opts.Bool(true), Trigger: "axis"}),
		charts.WithAxisPointerOpts(&opts.AxisPointer{Link: []opts.AxisPointerLink{{XAxisIndex: axes}}}),
		charts.WithAriaOpts(&opts.Aria{Enabled: opts.Bool(true), Label: &opts.AriaLabel{Enabled: opts.Bool(true), Description: description}}),
		charts.WithDataZoomOpts(
			opts.DataZoom{Type: "inside", XAxisIndex: axes, FilterMode: "filter"},
			opts.DataZoom{Type: "slider", XAxisIndex: axes, FilterMode: "filter"}),
	)
	p.Validate()
	return json.Marshal(p.JSON())
}
