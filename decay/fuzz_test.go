package decay

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
)

// FuzzAnalyze: whatever the samples and stamps are, the analysis ends, does not
// panic, quotes nothing that is not a number, and withholds the numbers of a
// refused record.
func FuzzAnalyze(f *testing.F) {
	f.Add([]byte{}, uint8(0), 1.0)
	for _, k := range kinds {
		rng := rand.New(rand.NewPCG(1, 1))
		y := k.make(rng)
		f.Add(samplesAsBytes(y[:min(len(y), 300)]), uint8(0), 1.0)
		f.Add(samplesAsBytes(y[:min(len(y), 120)]), uint8(7), 1e-200)
	}
	f.Fuzz(func(t *testing.T, data []byte, mode uint8, scale float64) {
		ch := fuzzChannel(data, mode, scale)
		if ch == nil {
			return
		}
		r := Analyze(ch, Options{})
		if (r.Status == Refused) != (r.Quantities == nil) {
			t.Fatalf("status %s with quantities %v", r.Status, r.Quantities)
		}
		if r.Quantities == nil {
			if len(r.Findings) == 0 {
				t.Fatal("refused without a reason")
			}
			return
		}
		q := r.Quantities
		for _, x := range []float64{q.NaturalFrequency.Value, q.NaturalFrequency.U, q.Q.Value, q.Q.U, q.TimeConstant.Value, q.TimeConstant.U} {
			if math.IsNaN(x) || math.IsInf(x, 0) || x < 0 {
				t.Fatalf("%+v", q)
			}
		}
		for _, d := range r.Decays {
			if d.First < 0 || d.Last > ch.Axis.N || d.First >= d.Last {
				t.Fatalf("gate [%d, %d) of %d", d.First, d.Last, ch.Axis.N)
			}
			d.Residuals(ch, d.First, d.Last-d.First)
		}
	})
}

// fuzzChannel reads 16-bit samples; mode bits add gaps, uneven stamps, and coarse levels.
func fuzzChannel(data []byte, mode uint8, scale float64) *capture.Channel {
	if len(data) > 1500 || math.IsNaN(scale) || math.IsInf(scale, 0) {
		return nil
	}
	ch := &capture.Channel{Name: "x", Unit: "V", Axis: &capture.Axis{Interval: 1e-6}}
	at := 0.0
	for i := 0; i+1 < len(data); i += 2 {
		v := float64(int16(binary.LittleEndian.Uint16(data[i:])))
		if mode&1 != 0 && int(v)%17 == 3 {
			v = math.NaN()
		}
		if mode&4 != 0 {
			v = math.Trunc(v / 1024)
		}
		ch.Samples = append(ch.Samples, v*scale)
		if mode&2 != 0 {
			ch.Axis.Times = append(ch.Axis.Times, at)
			at += 1e-6 * float64(1+data[i]%3)
		}
	}
	ch.Axis.N = len(ch.Samples)
	if ch.Axis.N == 0 {
		return nil
	}
	if mode&2 != 0 && ch.Axis.N > 1 {
		ch.Axis.Interval = at / float64(ch.Axis.N)
	}
	return ch
}

func samplesAsBytes(y []float64) []byte {
	out := make([]byte, 0, 2*len(y))
	for _, v := range y {
		out = binary.LittleEndian.AppendUint16(out, uint16(int16(math.Max(-30000, math.Min(30000, v*10000)))))
	}
	return out
}
