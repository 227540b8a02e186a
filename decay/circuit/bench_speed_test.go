package circuit

import "testing"

func BenchmarkParseBench(b *testing.B) {
	for b.Loop() {
		if _, err := ParseBench([]byte(loop07), "loop07.toml"); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkCompare(b *testing.B) {
	ring, sweep := reader, readerSweep()
	r, _ := physicalResult(&ring)
	w := swept(&sweep, 2e-3)
	bench := ring.bench(sweep)
	for b.Loop() {
		if c := Compare(bench, r, w); !c.Compared() {
			b.Fatal(c.Findings)
		}
	}
}

func BenchmarkFindComponents(b *testing.B) {
	rows := rowsOf(node, false, []float64{0, 220e-12, 470e-12, 1e-9}, 0.01, nil)
	bench := node.bench(node)
	for b.Loop() {
		if _, err := FindComponents(bench, rows); err != nil {
			b.Fatal(err)
		}
	}
}
