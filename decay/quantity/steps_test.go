package quantity

import (
	"math"
	"testing"
)

// TestSteps: the series of settings (common practice), and just beside each.
func TestSteps(t *testing.T) {
	series := []float64{1e-9, 2e-9, 5e-9, 1e-3, 2e-3, 5e-3, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 1e6, 2e6, 5e6}
	for _, x := range series {
		if StepUp(x) != x || StepDown(x) != x {
			t.Errorf("%g: up %g, down %g", x, StepUp(x), StepDown(x))
		}
		if y := StepUp(x * 1.001); !(y > x && y <= 2.5*x*1.001) {
			t.Errorf("above %g: up %g", x, y)
		}
		if y := StepDown(x * 1.001); y != x {
			t.Errorf("above %g: down %g", x, y)
		}
		if y := StepUp(math.Nextafter(x, 0)); y != x {
			t.Errorf("a rounding below %g: up %g", x, y)
		}
	}
	for _, w := range []struct{ x, up, down float64 }{{3, 5, 2}, {1.5, 2, 1}, {7, 10, 5}, {0.03, 0.05, 0.02}, {999, 1000, 500}} {
		if StepUp(w.x) != w.up || StepDown(w.x) != w.down {
			t.Errorf("%g: up %g, down %g, want %g and %g", w.x, StepUp(w.x), StepDown(w.x), w.up, w.down)
		}
	}
}
