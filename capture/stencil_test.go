package capture

import (
	"bytes"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// bothWays reads a text with stencils and without; fastRow and slowRow, which other
// tests hold against strconv, must find the same to the last bit.
func bothWays(t *testing.T, text []byte, opt Options) {
	t.Helper()
	if !canReadFitting {
		t.Skip("this processor has no use for stencils")
	}
	with, errWith := Read(bytes.NewReader(text), "loop 07.csv", opt)
	canReadFitting = false
	defer func() { canReadFitting = true }()
	without, errWithout := Read(bytes.NewReader(text), "loop 07.csv", opt)
	if fmt.Sprint(errWith) != fmt.Sprint(errWithout) {
		t.Errorf("with stencils: %v\nwithout: %v\n%.300q", errWith, errWithout, text)
	}
	if errWith != nil || errWithout != nil {
		return
	}
	bits := cmp.Comparer(func(x, y float64) bool { return math.Float64bits(x) == math.Float64bits(y) })
	inside := cmp.AllowUnexported(Capture{}, Layout{}, Channel{}, Axis{}, Finding{})
	if diff := cmp.Diff(without, with, bits, inside); diff != "" {
		t.Errorf("without and with stencils:\n%s\n%.300q", diff, text)
	}
}

// printedRows are rows of two or three numbers in a random print, some of them with a
// byte that does not belong there.
func printedRows(r *rand.Rand) string {
	one := func(of ...string) string { return of[r.IntN(len(of))] }
	mark := one(".", ".", ",")
	sep := one(",", ";", "\t", " ", "  ", ", ", " ,")
	if mark == "," && strings.Contains(sep, ",") {
		sep = ";"
	}
	end := one("\n", "\r\n", ",\n", " \n", "\n")
	stamp := one("%.6f", "%.9e", "%.3E", "%g", "%.0f", "%012.6f", "%11.4f", "%+.7f", "\"%.6f\"")
	values := []string{one("%.6f", "%.4e", "%+.5E", "%g", "%.0f", "% .3f", "%9.4f", "%+08.3f", "%.17g", "%.12f", "\"%.2f\""), one("%.3f", "%.2e", "%d", "%5.1f")}
	values = values[:1+r.IntN(2)]
	step, start, size := math.Pow10(-r.IntN(8)), float64(r.IntN(300)-100), math.Pow10(r.IntN(7)-3)
	var b strings.Builder
	b.WriteString("t" + sep + "V")
	b.WriteString(strings.Repeat(sep+"I", len(values)-1) + end)
	for i := range 120 + r.IntN(200) {
		row := fmt.Sprintf(stamp, (start+float64(i))*step)
		for _, v := range values {
			x := size * math.Exp(-float64(i)/80) * r.NormFloat64()
			if strings.HasSuffix(v, "d") {
				row += sep + fmt.Sprintf(v, int(x))
			} else {
				row += sep + fmt.Sprintf(v, x)
			}
		}
		row = strings.ReplaceAll(row, ".", mark)
		if r.IntN(150) == 0 {
			k := r.IntN(len(row))
			row = row[:k] + one("0", "7", "-", "+", " ", "e", ".", ",", "x", "\"", "", "\n") + row[min(len(row), k+r.IntN(2)):]
		}
		b.WriteString(row + end)
	}
	return b.String()
}

func TestStencils(t *testing.T) {
	for seed := range uint64(400) {
		bothWays(t, []byte(printedRows(rand.New(rand.NewPCG(seed, 11)))), Options{})
		if t.Failed() {
			t.Fatal("seed", seed)
		}
	}
}

// TestStencilsFit: rows that differ in digits and signs only are read by stencils.
func TestStencilsFit(t *testing.T) {
	if !canReadFitting {
		t.Skip("this processor has no use for stencils")
	}
	for _, row := range []string{
		"%.9e,%.6f\n", "%.6f;%+.5E\n", "\"%.4f\", \"%.3f\"\r\n", "%11.6f %9.4f\n", "2,%.6f,,%.3f,7,8\n", "%.3f\t%.12f\n",
		"%31.3f,%29.3f\n", "%.6f," + strings.Repeat("a word, ", 12) + "%.4f" + strings.Repeat(",0.5", 20) + "\n",
	} {
		var b strings.Builder
		for i := range 4000 {
			fmt.Fprintf(&b, row, 1+float64(i)*1e-3, math.Copysign(2+float64(i)/1e3, math.Sin(float64(i))))
		}
		h, refusal := newHead([]byte(b.String()), true)
		if refusal != nil {
			t.Fatal(refusal)
		}
		d, refusal := design(h, Options{})
		if refusal != nil {
			t.Fatal(refusal)
		}
		s := &scanner{p: &d.plan, h: h, src: &source{meter: &meter{}}, store: store{columns: d.plan.values}, rowLen: 20}
		c, w := s.chunk(h.bytes, 0), d.plan.worker()
		d.plan.begin(c, w)
		byStencil := 0
		for i := 0; i < len(c.text); {
			next, n := w.stencils.rows(&d.plan, c, i)
			if byStencil += n; n == 0 {
				next = d.plan.readRow(c, w, i, 1)
			}
			i = next
		}
		if c.rows != 4000 || byStencil < 3950 {
			t.Errorf("%q: %d of %d rows by stencils", row, byStencil, c.rows)
		}
	}
}

// FuzzStencil: what stands in any rows is the same with stencils and without.
func FuzzStencil(f *testing.F) {
	for seed := range uint64(20) {
		f.Add([]byte(printedRows(rand.New(rand.NewPCG(seed, 13)))))
	}
	for _, s := range texts() {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, b []byte) { bothWays(t, b, Options{}) })
}
