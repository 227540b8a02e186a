package report

import (
	"fmt"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

// A parameterRow is a fitted parameter with its value and its correlation with each.
type parameterRow struct {
	row
	Correlations []string
}

// symbols are the letters of the fitted parameters.
var symbols = map[string]row{
	decay.ParameterRate:           {Greek: "α"},
	decay.ParameterOmega:          {Greek: "ω", Index: "d"},
	decay.ParameterNaturalOmega:   {Greek: "ω", Index: "0"},
	decay.ParameterAmplitude:      {Letter: "A"},
	decay.ParameterPhase:          {Greek: "φ"},
	decay.ParameterOffset:         {Letter: "c"},
	decay.ParameterRate2:          {Greek: "α", Index: "2"},
	decay.ParameterOmega2:         {Greek: "ω", Index: "2"},
	decay.ParameterAmplitude2:     {Letter: "A", Index: "2"},
	decay.ParameterPhase2:         {Greek: "φ", Index: "2"},
	decay.ParameterBaselineRate:   {Greek: "β"},
	decay.ParameterBaselineHeight: {Letter: "b"},
	decay.ParameterGainedRate:     {Greek: "Δα"},
	decay.ParameterGainedOmega:    {Greek: "Δω"},
}

// parameterRows are the fitted parameters with the matrix of their correlations.
func parameterRows(p *quantity.Joint) (rows []parameterRow) {
	if p == nil {
		return nil
	}
	for i := range p.Len() {
		r := parameterRow{row: symbols[p.Name(i)]}
		r.Label, r.Quantity = p.Name(i), p.At(i)
		r.Quantity.Unit = clean(r.Quantity.Unit, unitLength)
		for k := range p.Len() {
			r.Correlations = append(r.Correlations, signed(p.Correlation(i, k)))
		}
		r.Correlations[i] = "1"
		rows = append(rows, r)
	}
	return rows
}

// signed writes a correlation with its sign; a zero has none.
func signed(x float64) string {
	s := fmt.Sprintf("%+.3f", x)
	if s == "-0.000" || s == "+0.000" {
		return "0.000"
	}
	if s[0] == '-' {
		return "−" + s[1:]
	}
	return s
}
