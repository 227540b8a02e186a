package quantity

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// A Trend is what repeated measurements of one quantity say of it over time.
type Trend struct {
	// N measurements counted.
	N int
	// Mean is their weighted mean.
	Mean Quantity
	// Change is the rise of the straight line through them from the first time to
	// the last, in the unit of the quantity; unknown with fewer than three times.
	Change Quantity
	// K is the coverage factor for 95 % of Change, larger than 2 where its
	// uncertainty comes from the scatter of few measurements.
	K float64
	// Birge is the ratio of the scatter about the line to what the uncertainties
	// let expect; NaN when they are unknown, or fewer than three.
	Birge float64
}

// Drifts reports whether the change is larger than its expanded uncertainty K u.
func (t *Trend) Drifts() bool { return math.Abs(t.Change.Value) > t.K*t.Change.U }

// TrendSums are the running sums that a [Trend] is made of: a new measurement costs
// the same however many there were. The zero value is of none; JSON keeps it exactly.
type TrendSums struct {
	N        int // measurements with a value
	From, To float64
	// Weighted by 1/u^2 those whose u is known and not zero, Plain all alike.
	Weighted, Plain lineMoments
}

// lineMoments are a weight, centres, and moments about the centres, updated as by
// D. H. D. West, Commun. ACM 22, 532 (1979), which loses no digits.
type lineMoments struct {
	N                      int
	W, X, Y, Sxx, Sxy, Syy float64
}

func (m *lineMoments) add(x, y, w float64) {
	m.N++
	m.W += w
	if m.N == 1 { // exactly: the way from zero to a date is long
		m.X, m.Y = x, y
		return
	}
	dx, dy := x-m.X, y-m.Y
	m.X += dx * w / m.W
	m.Y += dy * w / m.W
	m.Sxx += w * dx * (x - m.X)
	m.Sxy += w * dx * (y - m.Y)
	m.Syy += w * dy * (y - m.Y)
}

// Add counts a measurement q at the time at, in any unit of time and in any order;
// one without a value is left out, and all have one unit.
func (s *TrendSums) Add(at float64, q Quantity) {
	if !q.Known() {
		return
	}
	if s.N++; s.N == 1 {
		s.From, s.To = at, at
	}
	s.From, s.To = math.Min(s.From, at), math.Max(s.To, at)
	s.Plain.add(at, q.Value, 1)
	if w := 1 / (q.U * q.U); q.knownU() && finite(w) && w > 0 {
		s.Weighted.add(at, q.Value, w)
	}
}

// Trend returns mean and change of what was counted, in unit; with N = 0 nothing
// is known. With every uncertainty known the weights are 1/u^2, and where the
// scatter is larger than they explain, the uncertainties are multiplied by the
// Birge ratio sqrt(chi^2/(n-2)) (R. T. Birge, Phys. Rev. 40, 207, 1932; common
// practice). With one unknown or zero, all weigh the same. What all measurements
// share, such as a time base, moves neither and is not in the uncertainties.
func (s *TrendSums) Trend(unit string) *Trend {
	t := &Trend{N: s.N, Mean: Unknown(unit), Change: Unknown(unit), K: math.NaN(), Birge: math.NaN()}
	if s.N == 0 {
		return t
	}
	m, weighted := s.Plain, s.Weighted.N == s.N
	if weighted {
		m = s.Weighted
	}
	birge := math.Sqrt(m.Syy / float64(m.N-1)) // NaN of one
	if weighted && !(birge > 1) {
		birge = 1
	}
	t.Mean = New(m.Y, birge/math.Sqrt(m.W), unit)
	if m.N > 2 && m.Sxx > 0 {
		t.line(&m, s.To-s.From, weighted)
	}
	return t
}

// line takes change and coverage from the straight line (GUM H.3).
func (t *Trend) line(m *lineMoments, span float64, weighted bool) {
	dof := float64(m.N - 2)
	birge := math.Sqrt(math.Max(0, m.Syy-m.Sxy*m.Sxy/m.Sxx) / dof)
	if weighted {
		t.Birge = birge
		if birge <= 1 {
			birge, dof = 1, math.Inf(1) // the uncertainties stand, and with them k
		}
	}
	t.Change = New(m.Sxy/m.Sxx*span, birge/math.Sqrt(m.Sxx)*span, t.Mean.Unit)
	t.K = 2
	if !math.IsInf(dof, 1) {
		t.K = distuv.StudentsT{Sigma: 1, Nu: dof}.Quantile(0.975)
	}
}
