package report

import (
	"bufio"
	"bytes"
	"embed"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"strings"
	"sync"
	"unicode"

	"dieaway/decay"
	"dieaway/decay/circuit"
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
var pageTemplates = sync.OnceValue(func() *template.Template {
	return template.Must(template.ParseFS(pageFiles, "web/*.html"))
})

// A frame is what all kinds of pages have in common.
type frame struct {
	CSS             template.CSS
	Script, ECharts template.JS

	Title, Kind, Heading, What string
	// Status names the colour of the heading and stands before Verdict.
	Status, Verdict string
	Figures         []*figure
	// Result is the result as JSON, "" where a page holds none.
	Result template.JS
	// More is a script of this kind of page, beside that of the figures.
	More template.JS
}

// embed puts the result into the page, so that the evidence can be checked from the
// page alone.
func (f *frame) embed(result func(io.Writer) error) error {
	var text, escaped bytes.Buffer
	if err := result(&text); err != nil {
		return err
	}
	json.HTMLEscape(&escaped, bytes.TrimSpace(text.Bytes())) // no "</script>" can end it
	f.Result = template.JS(withoutMarks(escaped.String()))
	return nil
}

// A sheet is what a page shows: a frame with more in it.
type sheet interface {
	embed(result func(io.Writer) error) error
	write(w io.Writer, name string, p any) error
}

// writeSheet fills the template of the given name with a result and embeds the result
// in it. unread is the reason why a file could not be read.
func writeSheet[S sheet](w io.Writer, name string, unread error, fill func() (S, error), result func(io.Writer) error) error {
	if unread != nil {
		return fmt.Errorf("no page of a file that could not be read: %w", unread)
	}
	p, err := fill()
	if err != nil {
		return fmt.Errorf("charts of the page: %w", err)
	}
	if err := p.embed(result); err != nil {
		return err
	}
	return p.write(w, name, p)
}

// withoutMarks writes marks that turn the direction of writing as escapes, which
// mean the same to a reader of JSON and nothing to one of the page's source.
func withoutMarks(text string) string {
	var b strings.Builder
	for _, c := range text {
		if unicode.Is(unicode.Bidi_Control, c) {
			fmt.Fprintf(&b, `\u%04x`, c)
		} else {
			b.WriteRune(c)
		}
	}
	return b.String()
}

// write fills the frame and writes the page p, which holds it, by a template.
func (f *frame) write(w io.Writer, name string, p any) error {
	f.CSS, f.Script, f.ECharts = template.CSS(pageCSS), template.JS(pageJS), template.JS(echartsJS)
	jobs := []func() error{func() error { pageTemplates(); return nil }}
	for i, g := range f.Figures {
		if i > 0 {
			g.Suffix = fmt.Sprint(i + 1)
		}
		jobs = append(jobs, g.encode)
	}
	if err := together(jobs...); err != nil {
		return fmt.Errorf("charts of the page: %w", err)
	}
	b := bufio.NewWriterSize(w, 1<<16)
	if err := pageTemplates().ExecuteTemplate(b, name, p); err != nil {
		return err
	}
	return b.Flush()
}

// encode writes the figure as JSON, escaped for a script element.
func (f *figure) encode() error {
	data, err := json.Marshal(f)
	f.Data = template.JS(data)
	return err
}

// judge makes the verdict on limits part of the heading: what fails is no good page,
// however good its numbers.
func (f *frame) judge(limits circuit.Verdict) {
	switch {
	case limits == "" || f.Status == string(decay.Refused):
	case limits == circuit.Fail:
		f.Status, f.Verdict = string(limits), "outside the limits; "+f.Status+": "+f.Verdict
	case limits == circuit.Undecided && f.Status == string(decay.Good):
		f.Status, f.Verdict = string(limits), "not decided by the limits; "+f.Status+": "+f.Verdict
	default:
		f.Verdict += "; limits: " + string(limits)
	}
}
