package decay

import "sync"

// parallelFrom is the number of samples from which two cores pay.
const parallelFrom = 1 << 16

// halves runs work over samples 0 to n-1, on two cores where that pays, split at a
// multiple of the block length. work returns what is to be done with its sums;
// that is done in order, never at the same time.
func halves(n int, work func(first, last int) func()) {
	if n < parallelFrom {
		work(0, n)()
		return
	}
	half := n / 2 / blockLength * blockLength
	var second func()
	var wg sync.WaitGroup
	wg.Go(func() { second = work(half, n) })
	first := work(0, half)
	wg.Wait()
	first()
	second()
}

// severally calls work with 0 to count-1, at the same time where n samples make that
// pay.
func severally(count, n int, work func(i int)) {
	if n < parallelFrom {
		for i := range count {
			work(i)
		}
		return
	}
	var wg sync.WaitGroup
	for i := range count {
		wg.Go(func() { work(i) })
	}
	wg.Wait()
}
