package report

import (
	"cmp"
	"runtime"
	"sync"
	"sync/atomic"
)

// pieceSamples is about how many samples one core takes on at a time.
const pieceSamples = 1 << 17

// pieces cuts segments into shorter ones, between their bins.
func pieces(parts []segment) (out []segment) {
	for _, p := range parts {
		step := max(1, pieceSamples/p.bin) * p.bin
		for from := p.from; from < p.to; from += step {
			out = append(out, segment{indexRange{from, min(from+step, p.to)}, p.bin})
		}
	}
	return out
}

// inPieces draws a trace piece by piece on all cores: draw adds what a piece shows to
// a trace. The result is in the order of the segments.
func inPieces(parts []segment, draw func(segment, *trace)) trace {
	list := pieces(parts)
	drawn := make([]trace, len(list))
	var taken atomic.Int64
	var cores sync.WaitGroup
	for range min(len(list), runtime.GOMAXPROCS(0)) {
		cores.Go(func() {
			for i := taken.Add(1) - 1; i < int64(len(list)); i = taken.Add(1) - 1 {
				draw(list[i], &drawn[i])
			}
		})
	}
	cores.Wait()
	var all trace
	for _, tr := range drawn {
		all.t, all.v = append(all.t, tr.t...), append(all.v, tr.v...)
	}
	return all
}

// together does jobs at the same time and returns the first error, in their order.
func together(jobs ...func() error) error {
	errs := make([]error, len(jobs))
	var cores sync.WaitGroup
	for i, job := range jobs[1:] {
		cores.Go(func() { errs[i+1] = job() })
	}
	errs[0] = jobs[0]()
	cores.Wait()
	return cmp.Or(errs...)
}

// into is the job that puts what make makes into place.
func into[T any](place *T, make func() (T, error)) func() error {
	return func() (err error) {
		*place, err = make()
		return err
	}
}
