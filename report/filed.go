package report

import (
	"time"

	"dieaway/decay/quantity"
)

// A Filed is one measurement of a device as its history shows it.
type Filed struct {
	// Name is the entry's folder, beside the page.
	Name string
	Made time.Time
	// Kind is "ringdown", "sweep", "crosscheck", "components" or "unknown", Status the verdict on
	// the result, Verdict that on its limits ("" without any), File what was measured.
	Kind, Status, Verdict, File string
	// The quantities in Hz, 1 and s; unknown when withheld.
	NaturalFrequency, Q, TimeConstant quantity.Quantity
	Limits                            FiledLimits
}

// FiledLimits are the limits that a measurement was held against.
type FiledLimits struct{ NaturalFrequency, Q, TimeConstant Limits }

// Limits are in the SI unit of the quantity; nil where there is none.
type Limits struct{ Min, Max *float64 }

// A filedRow is the form of a row in the page, short as there may be many.
type filedRow struct {
	Name    string `json:"n"`
	Made    int64  `json:"t"` // milliseconds since 1970
	Kind    string `json:"k"`
	Status  string `json:"s"`
	Verdict string `json:"v,omitempty"`
	File    string `json:"c,omitempty"`
	// Value, standard uncertainty and text of frequency, Q and time constant.
	F  *float64 `json:"f,omitempty"`
	FU *float64 `json:"fu,omitempty"`
	FT string   `json:"ft,omitempty"`
	Q  *float64 `json:"q,omitempty"`
	QU *float64 `json:"qu,omitempty"`
	QT string   `json:"qt,omitempty"`
	T  *float64 `json:"a,omitempty"`
	TU *float64 `json:"au,omitempty"`
	TT string   `json:"at,omitempty"`
	// Limits of the same, lower and upper.
	LF *[2]*float64 `json:"lf,omitempty"`
	LQ *[2]*float64 `json:"lq,omitempty"`
	LT *[2]*float64 `json:"la,omitempty"`
}

// row is the measurement for the page; texts from outside are made safe to show.
func (f *Filed) row() *filedRow {
	r := &filedRow{Name: f.Name, Made: f.Made.UnixMilli(), Kind: clean(f.Kind, nameLength), Status: clean(f.Status, nameLength),
		Verdict: clean(f.Verdict, nameLength), File: fileName(f.File, nameLength)}
	r.F, r.FU, r.FT = numbersOf(f.NaturalFrequency)
	r.Q, r.QU, r.QT = numbersOf(f.Q)
	r.T, r.TU, r.TT = numbersOf(f.TimeConstant)
	r.LF, r.LQ, r.LT = f.Limits.NaturalFrequency.pair(), f.Limits.Q.pair(), f.Limits.TimeConstant.pair()
	return r
}

func numbersOf(q quantity.Quantity) (value, u *float64, text string) {
	if !q.Known() {
		return nil, nil, ""
	}
	value = &q.Value
	if q.U >= 0 && q.U < 1e300 {
		u = &q.U
	}
	return value, u, q.String()
}

func (l Limits) pair() *[2]*float64 {
	if l.Min == nil && l.Max == nil {
		return nil
	}
	return &[2]*float64{l.Min, l.Max}
}
