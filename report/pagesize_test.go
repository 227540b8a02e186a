package report

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"
)

// sizes are records that could make a large page, each in its own way.
func sizes() map[string]loop {
	long := loop07()
	long.samples, long.interval, long.tau = 3_000_000, 2e-9, 1e-3
	highQ := loop07()
	highQ.samples, highQ.interval, highQ.tau = 2_000_000, 1e-6, 0.4
	many := loop07()
	many.samples, many.decays, many.tau = 500_000, 60, 200e-6
	sparse := loop07()
	sparse.samples, sparse.interval = 9_999, 3.1e-6
	last, next := loop07(), loop07()
	last.samples, next.samples = exactLimit, exactLimit+1
	short := loop07()
	short.samples, short.start = 12, 0
	return map[string]loop{"long": long, "high Q": highQ, "many decays": many, "sparse": sparse,
		"last exact": last, "first reduced": next, "short": short}
}

func TestPageSize(t *testing.T) {
	for name, l := range sizes() {
		page := pageOf(t, l.ringDown())
		t.Logf("%s: %d samples, %d bytes", name, l.samples, len(page))
		if len(page) > mostBytes {
			t.Errorf("%s: %d bytes, more than %d", name, len(page), mostBytes)
		}
	}
}

// What is missing, over range or without a spread must not break the charts.
func TestPageOddRecords(t *testing.T) {
	gaps := loop07().ringDown()
	for i := 300; i < 340; i++ {
		gaps.Channel.Samples[i] = math.NaN()
	}
	gaps.Channel.Samples[10] = math.Inf(1)
	empty := refusedRecord()
	for i := range empty.Channel.Samples {
		empty.Channel.Samples[i] = math.NaN()
	}
	flat := refusedRecord()
	for i := range flat.Channel.Samples {
		flat.Channel.Samples[i] = 0
	}
	unknowns := loop07().ringDown()
	d := unknowns.Result.Decays[0]
	d.NoiseRMS, d.SNR, d.Cycles, d.Quantities.DampedFrequency = math.NaN(), math.NaN(), math.NaN(), unknown
	d.AtStart, unknowns.Result.Readings.Line = nil, [2]float64{math.NaN(), math.NaN()}
	long := loop07()
	long.samples = 30_000
	holes := long.ringDown()
	for i := range holes.Channel.Samples {
		if i%3 != 0 || i > 20_000 {
			holes.Channel.Samples[i] = math.NaN()
		}
	}
	for name, r := range map[string]*RingDown{"gaps": gaps, "empty": empty, "flat": flat, "unknowns": unknowns, "holes": holes} {
		page := pageOf(t, r)
		if data := dataOf(t, page); !json.Valid([]byte(data)) || strings.Contains(data, "NaN") || strings.Contains(data, "Inf") {
			t.Errorf("%s: the data of the charts is no JSON", name)
		}
		if strings.Contains(strings.Join(texts(elements(t, page), "main"), " "), "NaN") {
			t.Errorf("%s: NaN stands on the page", name)
		}
	}
}

// The embedded library is the one whose origin and licence are on record.
func TestECharts(t *testing.T) {
	readme, err := os.ReadFile("echarts/README.md")
	if err != nil {
		t.Fatal(err)
	}
	sum := sha256.Sum256([]byte(echartsJS))
	if line := hex.EncodeToString(sum[:]) + "  echarts.common.min.js"; !bytes.Contains(readme, []byte(line)) {
		t.Errorf("echarts/README.md does not have %s", line)
	}
	for _, name := range []string{"LICENSE", "NOTICE", "LICENSE-d3"} {
		if _, err := os.Stat("echarts/" + name); err != nil {
			t.Error(err)
		}
	}
	if strings.Contains(strings.ToLower(echartsJS), "</script") {
		t.Error("the library ends the script element that holds it")
	}
}

func BenchmarkWritePage(b *testing.B) {
	for _, n := range []int{2_500, 1_000_000, 10_000_000} {
		l := loop07()
		l.samples, l.interval = n, 500e-6/float64(n)
		r := l.ringDown()
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			b.SetBytes(int64(8 * n))
			var size int
			for b.Loop() {
				size = len(pageOf(b, r))
			}
			b.ReportMetric(float64(size), "page-bytes")
		})
	}
}
