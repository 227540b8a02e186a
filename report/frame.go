package report

import (
	"bufio"
	"embed"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
)

//go:embed web/*.html
var pageFiles embed.FS

//go:embed web/page.css
var pageCSS string

//go:embed web/page.js
var pageJS string

//go:embed echarts/echarts.common.min.js
var echartsJS string

// pageTemplates holds one template for each kind of page, and their parts.
var pageTemplates = template.Must(template.ParseFS(pageFiles, "web/*.html"))

// A frame is what all kinds of pages have in common.
type frame struct {
	CSS             template.CSS
	Script, ECharts template.JS

	Title, Kind, Heading, What string
	// Status names the colour of the heading and stands before Verdict.
	Status, Verdict string
	Figures         []*figure
	// More is a script of this kind of page, beside that of the figures.
	More template.JS
}

// write fills the frame and writes the page p, which holds it, by a template.
func (f *frame) write(w io.Writer, name string, p any) error {
	f.CSS, f.Script, f.ECharts = template.CSS(pageCSS), template.JS(pageJS), template.JS(echartsJS)
	for i, g := range f.Figures {
		if i > 0 {
			g.Suffix = fmt.Sprint(i + 1)
		}
		data, err := json.Marshal(g) // escaped for a script element
		if err != nil {
			return fmt.Errorf("charts of the page: %w", err)
		}
		g.Data = template.JS(data)
	}
	b := bufio.NewWriterSize(w, 1<<16)
	if err := pageTemplates.ExecuteTemplate(b, name, p); err != nil {
		return err
	}
	return b.Flush()
}
