package report

import (
	"errors"
	"fmt"
	"io"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// A Sweep is everything there is to say about one driven sweep. Either Err is
// set, or Table and Result are.
type Sweep struct {
	Table  *capture.Sweep
	Result *driven.Result
	// Err says why the file could not be read.
	Err error
	// File is the name of the file as it was given, "-" for standard input; ""
	// takes that of Table.
	File string
	// Device is the name of the circuit under test, "" when nobody gave one.
	Device string
	// Circuit is what the result says of the circuit, nil without a bench file.
	Circuit *circuit.Analysis
	// Limits is how the result stands to the limits of the bench file, nil without any.
	Limits *circuit.Judgement
	// Origin says how the result was made; the page shows it.
	Origin Origin

	// predicted is the response that a ring-down says, nil for none: magnitude and
	// phase in rad at a frequency in Hz.
	predicted func(f float64) (magnitude, phase float64)
}

func (r *Sweep) check() error {
	if r.Err == nil && (r.Table == nil || r.Result == nil) {
		return errors.New("report: a sweep without table or result")
	}
	return nil
}

func (r *Sweep) file() string {
	if r.File == "" && r.Table != nil {
		return r.Table.File
	}
	return r.File
}

func (r *Sweep) sha256() string {
	if r.Table == nil {
		return ""
	}
	return r.Table.SHA256
}

// Findings returns what speaks against the result, gravest first: the findings of
// the analysis, of the circuit and of the reader, each once. It is not nil.
func (r *Sweep) Findings() []capture.Finding {
	all := []capture.Finding{}
	if r.Result != nil {
		all = append(all, r.Result.Findings...)
	}
	if r.Circuit != nil {
		all = append(all, r.Circuit.Findings...)
	}
	if r.Table != nil {
		all = withReader(all, r.Table.Findings)
	}
	return gravest(all)
}

// Status is the verdict on the result with the findings of the reader counted in;
// "" when the file could not be read.
func (r *Sweep) Status() decay.Status {
	if r.Result == nil {
		return ""
	}
	return statusOf(r.Result.Status, r.Findings())
}

func (r *Sweep) refused() bool {
	return r.Result.Status == decay.Refused || r.Result.Quantities == nil
}

func (r *Sweep) verdict() string {
	if r.refused() {
		return "no resonance that can be measured: the numbers are withheld"
	}
	return verdictOf(r.Findings())
}

// source names response and file, safe to show.
func (r *Sweep) source() string {
	name := clean(r.Table.Name, nameLength)
	if name == "" {
		name = "response"
	}
	return name + " of " + fileName(r.file(), nameLength)
}

func (r *Sweep) unit() string { return clean(r.Result.Unit, unitLength) }

// schemaSweep names the form of the JSON; scripts depend on it.
const schemaSweep = "dieaway.sweep.v1"

// The structures below give the keys of the JSON their order.

type jsonSweep struct {
	Schema     string               `json:"schema"`
	Status     decay.Status         `json:"status"`
	File       *string              `json:"file"`
	SHA256     *string              `json:"sha256"`
	Device     *string              `json:"device"`
	Points     int                  `json:"points"`
	Across     *string              `json:"across"`
	Quantities *jsonSweepQuantities `json:"quantities"`
	Readings   jsonSweepReadings    `json:"readings"`
	Circuit    *jsonCircuit         `json:"circuit,omitempty"` // with a bench file
	Limits     *jsonLimits          `json:"limits,omitempty"`  // with limits in it
	Findings   []capture.Finding    `json:"findings"`
}

type jsonSweepQuantities struct {
	NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	Q                quantity.Quantity `json:"q"`
	Bandwidth        quantity.Quantity `json:"bandwidth_hz"`
	DampingRatio     quantity.Quantity `json:"damping_ratio"`
	DampedFrequency  quantity.Quantity `json:"damped_frequency_hz"`
	PeakFrequency    quantity.Quantity `json:"peak_frequency_hz"`
	PeakGain         quantity.Quantity `json:"peak_gain"`
}

type jsonSweepReadings struct {
	HalfPower struct {
		Q         quantity.Quantity `json:"q"`
		Bandwidth quantity.Quantity `json:"bandwidth_hz"`
	} `json:"half_power"`
	ReactanceRatio struct {
		NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	} `json:"reactance_ratio"`
}

// WriteJSON writes the sweep as one line of JSON, schema dieaway.sweep.v1, by the
// rules of [RingDown.WriteJSON].
func (r *Sweep) WriteJSON(w io.Writer) error {
	if err := r.check(); err != nil {
		return err
	}
	if r.Err != nil {
		return writeLine(w, unreadable(schemaSweep, r.file(), r.sha256(), r.Device, r.Err))
	}
	return writeLine(w, r.json())
}

func (r *Sweep) json() *jsonSweep {
	out := &jsonSweep{Schema: schemaSweep, Status: r.Status(), File: orNull(r.file()), SHA256: orNull(r.sha256()), Device: orNull(r.Device),
		Points: len(r.Table.Frequency), Across: r.across(),
		Circuit: circuitJSON(r.Circuit), Limits: limitsJSON(r.Limits), Findings: r.Findings()}
	read := &out.Readings
	read.HalfPower.Q, read.HalfPower.Bandwidth, read.ReactanceRatio.NaturalFrequency = unknown, unknown, unknown
	if r.refused() {
		return out
	}
	q, from := r.Result.Quantities, &r.Result.Readings
	out.Quantities = &jsonSweepQuantities{q.NaturalFrequency, q.Q, q.Bandwidth, q.DampingRatio, q.DampedFrequency, q.PeakFrequency, q.PeakGain}
	read.HalfPower.Q, read.HalfPower.Bandwidth, read.ReactanceRatio.NaturalFrequency = from.Q, from.Bandwidth, from.ReactanceRatio
	return out
}

// sweepRows returns the result to quote, what matters most first.
func sweepRows(r *driven.Result) []row {
	q := r.Quantities
	peak, gain := "peak frequency", "peak response"
	if r.Across == capture.Both {
		peak, gain = "notch frequency", "response in notch"
	}
	level := q.PeakGain
	level.Unit = clean(level.Unit, unitLength)
	return []row{
		{"natural frequency", "f", "", "0", q.NaturalFrequency},
		{"quality factor", "Q", "", "", q.Q},
		{"bandwidth", "B", "", "", q.Bandwidth},
		{peak, "f", "", "p", q.PeakFrequency},
		{"damped frequency", "f", "", "d", q.DampedFrequency},
		{"damping ratio", "zeta", "ζ", "", q.DampingRatio},
		{gain, "G", "", "p", level},
	}
}

// sweepComparisons returns the readings beside the fit.
func sweepComparisons(r *driven.Result) []comparison {
	fit, read := r.Quantities, &r.Readings
	var out []comparison
	for _, c := range []comparison{
		{"quality factor, from the half-power width", "Q from half power", fit.Q, read.Q},
		{"bandwidth, from the half-power points", "B from half power", fit.Bandwidth, read.Bandwidth},
		{"frequency of the peak, through three rows", "f_p from the peak", fit.PeakFrequency, read.Peak.Frequency},
		{"natural frequency, where V_L = V_C", "f_0 where V_L = V_C", fit.NaturalFrequency, read.ReactanceRatio},
	} {
		if c.Reading.Known() && c.Fit.Known() {
			out = append(out, c)
		}
	}
	return out
}

// acrossLine says what was fitted, and what decided it.
func acrossLine(r *driven.Result) string {
	part := map[capture.Part]string{capture.Capacitor: "the capacitor", capture.Inductor: "the coil",
		capture.Resistor: "the resistor (the current)", capture.Both: "coil and capacitor together, a notch"}[r.Across]
	return part + "; " + clean(r.Why, longName)
}

// fittedLine says what was fitted to what.
func fittedLine(r *driven.Result) string {
	what := "the magnitude"
	if r.Complex {
		what = "magnitude and phase together"
	}
	for _, c := range r.Corrections {
		what += ", " + c
	}
	return what
}

// rowsLine says how many rows there are and where.
func (r *Sweep) rowsLine() string {
	lo, hi := r.Table.Span()
	s := fmt.Sprintf("%s from %s to %s", plural(len(r.Table.Frequency), "row"), quantity.Format(lo, "Hz", 6), quantity.Format(hi, "Hz", 6))
	out := 0
	for _, p := range r.Result.Points {
		if p.Outlier {
			out++
		}
	}
	if out > 0 {
		s += fmt.Sprintf(", %d of them left out", out)
	}
	return s
}

// scatterLine says how far the rows lie off the curve.
func (r *Sweep) scatterLine() string {
	top, _ := r.peak()
	s := quantity.Format(r.Result.NoiseRMS, r.unit(), 3) + " rms where the response is strongest"
	if p := quantity.Percent(r.Result.NoiseRMS / top); p != "" && !math.IsNaN(top) {
		s += ", " + p + " of it"
	}
	return s
}

// peak is the greatest response of the rows and its frequency in Hz.
func (r *Sweep) peak() (top, at float64) {
	top, at = math.NaN(), math.NaN()
	for _, p := range r.Result.Points {
		if !p.Outlier && !(p.Magnitude <= top) {
			top, at = p.Magnitude, p.Frequency
		}
	}
	return top, at
}

// trendLine says whether the f0 of each row moves over the sweep, "" without it.
func trendLine(r *driven.Result) string {
	t := r.Readings.Trend
	if !t.Known() {
		return ""
	}
	return fmt.Sprintf("f_0 of the single rows moves by %s for each of the frequency", quantity.New(100*t.Value, 100*t.U, "%").String())
}

// across is null for a refused sweep of which nobody said what it was measured across.
func (r *Sweep) across() *string {
	if r.refused() && r.Result.Guessed {
		return nil
	}
	return orNull(string(r.Result.Across))
}
