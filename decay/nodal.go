package decay

import (
	"math"
	"slices"
)

// nodal holds what the samples of a record come to at the nodes of blocks of rising
// length (see [nodes]), for functions near exp(jwn), n in samples. Blocks are counted
// from the start of the record, so that they serve any window of it.
type nodal struct {
	s      series // that the blocks lie in
	w, ref float64
	levels [nodeLevels]nodeLevel
}

const (
	nodeLevels = 4       // the longest blocks have 4096 samples
	nodalFrom  = 1 << 12 // samples from which sums over nodes pay
)

// nodeLevel holds blocks of one length, from number first on.
type nodeLevel struct {
	length int
	first  int
	blocks []nodeSums
	whole  *nodeHeld // of a block without gaps
	// Shortest blocks are summed up from samples, the others from some of the level
	// below: for functions near w, near 2w, and smooth ones.
	weights [3]*nodeWeights
	join    [3]*nodeJoin
}

// nodeSums are those of one block.
type nodeSums struct {
	y       atNodes
	sum, yy float64 // of y - ref and of its square
	held    *nodeHeld
}

// nodeHeld is what the number 1 comes to at the nodes, over the samples that are there,
// for functions near exp(jwn), near its square, and for smooth ones.
type nodeHeld struct {
	one, square, smooth atNodes
	n                   int
}

// nodalOf is for the samples of s and functions near exp(jwn), n in intervals; nil where
// it does not pay.
func nodalOf(s series, w float64) *nodal {
	if !s.even() || s.len() < nodalFrom {
		return nil
	}
	return newNodal(s, w*s.spacing(), s.level())
}

// newNodal is for even samples of s, counted about ref.
func newNodal(s series, w, ref float64) *nodal {
	n := &nodal{s: s.slice(0, 0), w: w, ref: ref}
	near := [3]float64{n.w, 2 * n.w, 0}
	length := nodeBlock
	for j := range n.levels {
		l := &n.levels[j]
		l.length = length
		length *= nodeJoined
		for k, w := range near {
			if j == 0 {
				l.weights[k] = newNodeWeights(w)
			} else {
				l.join[k] = newNodeJoin(w, l.length/nodeJoined)
			}
		}
		if j == 0 {
			l.whole = l.held(make([]float64, nodeBlock))
		} else {
			below := n.levels[j-1].whole
			l.whole = l.heldBy([nodeJoined]*nodeHeld{below, below, below, below})
		}
		l.first = (s.from + l.length - 1) / l.length
	}
	n.extend(s)
	return n
}

// over is the same for the samples of window and functions near w: n itself where it
// knows them or can be extended to do so.
func (n *nodal) over(window series, w float64) *nodal {
	if n == nil || !window.even() || !n.sharesSamples(window) || math.Abs(w*window.spacing()-n.w)*(nodeBlock/2) > nodeReach/4 {
		return nodalOf(window, w)
	}
	n.extend(window)
	return n
}

// sharesSamples reports whether one of the window and the samples of n is a part of the
// other.
func (n *nodal) sharesSamples(window series) bool {
	part, whole := window, n.s
	if part.len() > whole.len() {
		part, whole = whole, part
	}
	at := part.from - whole.from
	return part.stride == whole.stride && part.len() > 0 && at >= 0 && at+part.len() <= whole.len() && &whole.y[at] == &part.y[0]
}

// extend sums over the whole blocks of s that are not there yet.
func (n *nodal) extend(s series) {
	for j := range n.levels {
		l := &n.levels[j]
		first, last := (s.from+l.length-1)/l.length, (s.from+s.len())/l.length
		head := max(0, min(l.first-first, last-first))
		tail := max(0, last-max(first, l.first+len(l.blocks)))
		if head > 0 {
			l.blocks = slices.Concat(make([]nodeSums, head), l.blocks)
			l.first = first
		}
		l.blocks = append(l.blocks, make([]nodeSums, tail)...)
		sumUp := func(k int) {
			if j == 0 {
				l.sumSamples(s, k, n.ref)
			} else {
				l.sumBlocks(&n.levels[j-1], k)
			}
		}
		for _, part := range [2][2]int{{0, head}, {len(l.blocks) - tail, len(l.blocks)}} {
			halves((part[1]-part[0])*l.length, func(first, last int) func() {
				for k := first / l.length; k < last/l.length; k++ {
					sumUp(l.first + part[0] + k)
				}
				return func() {}
			})
		}
	}
	if s.from < n.s.from || s.from+s.len() > n.s.from+n.s.len() {
		n.s = s
	}
}

// sumSamples sums up block k, which lies in s.
func (l *nodeLevel) sumSamples(s series, k int, ref float64) {
	b := &l.blocks[k-l.first]
	y := (*[nodeBlock]float64)(s.y[k*nodeBlock-s.from:])
	var count int
	b.sum, b.yy, count = sums(y[:], ref)
	b.held = l.whole
	if count < nodeBlock {
		b.held = l.held(y[:])
		y = filledWith(y, ref)
	}
	b.y = l.weights[0].sums(y, ref)
}

// filledWith returns y with ref for what is missing.
func filledWith(y *[nodeBlock]float64, ref float64) *[nodeBlock]float64 {
	out := *y
	for i, v := range out {
		if v != v {
			out[i] = ref
		}
	}
	return &out
}

// held is of the samples of y that are there.
func (l *nodeLevel) held(y []float64) *nodeHeld {
	var ones [nodeBlock]float64
	out := new(nodeHeld)
	for i, v := range y {
		if v == v {
			ones[i] = 1
			out.n++
		}
	}
	out.one = l.weights[0].sums(&ones, 0)
	out.square = l.weights[1].sums(&ones, 0)
	out.smooth = l.weights[2].sums(&ones, 0)
	return out
}

// sumBlocks sums up block k from those of the level below that make it.
func (l *nodeLevel) sumBlocks(below *nodeLevel, k int) {
	b := &l.blocks[k-l.first]
	b.held = l.whole
	var y [nodeJoined]*atNodes
	var held [nodeJoined]*nodeHeld
	for i := range y {
		part := &below.blocks[nodeJoined*k+i-below.first]
		y[i], held[i] = &part.y, part.held
		b.sum, b.yy = b.sum+part.sum, b.yy+part.yy
		if part.held != below.whole {
			b.held = nil
		}
	}
	b.y = l.join[0].sums(y)
	if b.held == nil {
		b.held = l.heldBy(held)
	}
}

// heldBy is of the block that parts make.
func (l *nodeLevel) heldBy(parts [nodeJoined]*nodeHeld) *nodeHeld {
	var one, square, smooth [nodeJoined]*atNodes
	out := new(nodeHeld)
	for i, p := range parts {
		one[i], square[i], smooth[i] = &p.one, &p.square, &p.smooth
		out.n += p.n
	}
	out.one, out.square, out.smooth = l.join[0].sums(one), l.join[1].sums(square), l.join[2].sums(smooth)
	return out
}

// cover visits samples first to last-1 of the record in order: by the longest blocks of
// levels j up to top that fit, and what is left, with the shortest block around corner,
// as samples.
func (n *nodal) cover(first, last, top int, corner float64, block func(j, at int, b *nodeSums), rest func(first, last int)) {
	for at := first; at < last; {
		j := top
		for ; j >= 0; j-- {
			l := &n.levels[j]
			if k := at / l.length; k*l.length == at && at+l.length <= last && (corner < float64(at) || corner > float64(at+l.length)) {
				block(j, at, &l.blocks[k-l.first])
				at += l.length
				break
			}
		}
		if j < 0 {
			to := min(last, (at/nodeBlock+1)*nodeBlock)
			rest(at, to)
			at = to
		}
	}
}

// energy returns the number of the samples of window that are there and the sum of the
// squares about ref.
func (n *nodal) energy(window series) (count int, yy float64) {
	first := window.from
	n.cover(first, first+window.len(), nodeLevels-1, math.Inf(1), func(_, _ int, b *nodeSums) {
		count, yy = count+b.held.n, yy+b.yy
	}, func(from, to int) {
		_, squares, m := sums(window.y[from-first:to-first], n.ref)
		count, yy = count+m, yy+squares
	})
	return count, yy
}

// level is that of the longest blocks in which functions that depart from exp(jwn) by
// depart radians a sample do so by reach at most; -1 when there is none.
func (n *nodal) level(depart, reach float64) int {
	j := nodeLevels - 1
	for ; j >= 0 && !(depart*float64(n.levels[j].length)/2 <= reach); j-- {
	}
	return j
}
