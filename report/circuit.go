package report

import (
	"math"
	"strings"

	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// The structures below give the keys of the JSON their order.

type jsonCircuit struct {
	Topology    circuit.Topology  `json:"topology"`
	Known       *string           `json:"known"`
	Inductance  quantity.Quantity `json:"inductance_h"`
	Capacitance quantity.Quantity `json:"capacitance_f"`
	Resistance  quantity.Quantity `json:"resistance_ohm"`
	Unloaded    jsonCondition     `json:"unloaded"`
	LossBudget  []jsonLoss        `json:"loss_budget"`
	Given       []jsonGiven       `json:"given"`
}

type jsonCondition struct {
	NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	Q                quantity.Quantity `json:"q"`
	DampingRatio     quantity.Quantity `json:"damping_ratio"`
	Bandwidth        quantity.Quantity `json:"bandwidth_hz"`
}

type jsonLoss struct {
	Part       string            `json:"part"`
	Resistance quantity.Quantity `json:"resistance_ohm"`
	Q          quantity.Quantity `json:"q"`
	Share      number            `json:"share"`
	ShareU     number            `json:"share_u"`
}

type jsonGiven struct {
	Quantity string            `json:"quantity"`
	Given    quantity.Quantity `json:"given"`
	Found    quantity.Quantity `json:"found"`
	En       number            `json:"e_n"`
}

type jsonLimits struct {
	Verdict circuit.Verdict `json:"verdict"`
	Rule    circuit.Rule    `json:"rule"`
	Checks  []jsonCheck     `json:"checks"`
}

type jsonCheck struct {
	Quantity string            `json:"quantity"`
	Result   quantity.Quantity `json:"result"`
	Min      number            `json:"min"`
	Max      number            `json:"max"`
	Verdict  circuit.Verdict   `json:"verdict"`
}

func circuitJSON(a *circuit.Analysis) *jsonCircuit {
	if a == nil {
		return nil
	}
	out := &jsonCircuit{Topology: a.Topology, Known: orNull(a.Known), Inductance: a.Inductance, Capacitance: a.Capacitance,
		Resistance: a.Resistance, Unloaded: conditionJSON(a.Unloaded), LossBudget: budgetJSON(a.Budget), Given: []jsonGiven{}}
	for _, g := range a.Given {
		out.Given = append(out.Given, jsonGiven{jsonKey(g.Name, g.Found.Unit), g.Given, g.Found, number(g.En)})
	}
	return out
}

func conditionJSON(c circuit.Condition) jsonCondition {
	return jsonCondition{c.NaturalFrequency, c.Q, c.DampingRatio, c.Bandwidth}
}

func budgetJSON(budget []circuit.Loss) []jsonLoss {
	out := []jsonLoss{}
	for _, l := range budget {
		out = append(out, jsonLoss{l.Part, l.Resistance, l.Q, number(l.Share.Value), number(l.Share.U)})
	}
	return out
}

func limitsJSON(j *circuit.Judgement) *jsonLimits {
	if j == nil {
		return nil
	}
	out := &jsonLimits{Verdict: j.Verdict, Rule: j.Rule}
	for _, c := range j.Checks {
		out.Checks = append(out.Checks, jsonCheck{jsonKey(c.Quantity, c.Unit), c.Result, number(c.Min), number(c.Max), c.Verdict})
	}
	return out
}

// jsonKey appends the unit to a name, as all keys have it.
func jsonKey(name, unit string) string {
	suffix := map[string]string{"Hz": "_hz", "s": "_s", "1/s": "_per_s", "H": "_h", "F": "_f", "ohm": "_ohm"}
	return strings.ReplaceAll(name, " ", "_") + suffix[unit]
}

// A lossRow is one part of a loss budget for people.
type lossRow struct {
	Part, Resistance, Q, Share string
	Percent                    float64 // length of its bar, 0 to 100
}

// lossRows are the parts of a budget and, last, their sum.
func lossRows(budget []circuit.Loss, total circuit.Loss) []lossRow {
	if len(budget) == 0 {
		return nil
	}
	var out []lossRow
	for _, l := range append(budget[:len(budget):len(budget)], total) {
		row := lossRow{Part: l.Part, Resistance: l.Resistance.String(), Q: l.Q.String(),
			Share: circuit.Share(l.Share)}
		row.Percent = math.Round(1000*math.Max(0, math.Min(1, l.Share.Value))) / 10
		if l.Part == total.Part {
			row.Share = "100 %"
		}
		out = append(out, row)
	}
	return out
}

// componentRows are the component values that follow from a ring-down.
func componentRows(a *circuit.Analysis) []fact {
	if !a.Inductance.Known() {
		return nil
	}
	named := func(q quantity.Quantity, name string) string {
		s := q.String()
		if a.Known == name {
			return s + ", from the bench file"
		}
		for _, g := range a.Given {
			if g.Name == name {
				s += "; the bench file says " + g.Given.String()
			}
		}
		return s
	}
	facts := []fact{{"inductance", named(a.Inductance, "inductance")}, {"capacitance", named(a.Capacitance, "capacitance")}}
	if a.Known == "coil resistance" {
		facts = append(facts, fact{"coil resistance", named(a.Resistance, "coil resistance")})
	}
	return append(facts, unloadedFact(a.Unloaded))
}

// unloadedFact says how the circuit rings by itself.
func unloadedFact(c circuit.Condition) fact {
	return fact{"unloaded", "f_0 " + c.NaturalFrequency.String() + ", Q " + c.Q.String() + ": without source and probe"}
}

// A limitRow is one check for people.
type limitRow struct {
	Label, Result, Limits string
	Verdict               circuit.Verdict
}

func limitRows(j *circuit.Judgement) (rows []limitRow) {
	for _, c := range j.Checks {
		rows = append(rows, limitRow{quantityLabel(c.Quantity), c.Result.String(), rangeText(c.Range), c.Verdict})
	}
	return rows
}

// quantityLabel is the key of a quantity as the tables call it.
func quantityLabel(key string) string {
	switch key {
	case "q":
		return "quality factor"
	case "unloaded_q":
		return "unloaded Q"
	}
	return strings.ReplaceAll(key, "_", " ")
}

// rangeText says what is wanted: "124 kHz to 126 kHz", "at least 30".
func rangeText(r circuit.Range) string {
	low, high := quantity.Format(r.Min, r.Unit, 6), quantity.Format(r.Max, r.Unit, 6)
	switch {
	case math.IsNaN(r.Min):
		return "at most " + high
	case math.IsNaN(r.Max):
		return "at least " + low
	}
	return low + " to " + high
}

// verdictOfLimits is the judgement in one line for people.
func verdictOfLimits(j *circuit.Judgement) string {
	s := map[circuit.Verdict]string{
		circuit.Pass:      "inside the limits",
		circuit.Fail:      "outside the limits",
		circuit.Undecided: "too near to a limit for the uncertainty, or not known",
	}[j.Verdict]
	if j.Rule == circuit.Guarded {
		return s + " (guarded: the expanded uncertainty U, k = 2, is kept clear of them)"
	}
	return s + " (simple: the value counts, whatever its uncertainty)"
}
