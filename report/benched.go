package report

import "dieaway/decay/circuit"

// A benched is what a page shows of the bench file: the limits and how they are kept,
// and what the result says of the circuit.
type benched struct {
	Judgement *circuit.Judgement // nil without limits
	Circuit   []fact
	Losses    []lossRow
}

func benchedOf(a *circuit.Analysis, j *circuit.Judgement) benched {
	b := benched{Judgement: j}
	if a != nil {
		b.Circuit, b.Losses = onPage(componentRows(a)), lossRows(a.Budget, a.Total)
	}
	return b
}

// verdictOnLimits is "" without limits.
func (b *benched) verdictOnLimits() circuit.Verdict {
	if b.Judgement == nil {
		return ""
	}
	return b.Judgement.Verdict
}

// LimitRows are the checks of the judgement.
func (b *benched) LimitRows() []limitRow { return limitRows(b.Judgement) }

// LimitVerdict is the judgement in one line.
func (b *benched) LimitVerdict() string { return verdictOfLimits(b.Judgement) }
