package report

import (
	"encoding/json"
	"errors"
	"io"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// schemaRingDown names the form of the JSON; scripts depend on it.
const schemaRingDown = "dieaway.ringdown.v1"

// WriteJSON writes the ring-down as one line of JSON, schema dieaway.ringdown.v1.
// Unknown numbers are null, never NaN or Inf. A refused record has null for its
// quantities and no decays; a file that could not be read says why.
func (r *RingDown) WriteJSON(w io.Writer) error {
	if err := r.check(); err != nil {
		return err
	}
	if r.Err != nil {
		return writeLine(w, unreadable(schemaRingDown, r.file(), r.sha256(), r.Device, r.Err))
	}
	return writeLine(w, r.json())
}

// writeLine writes one line of JSON.
func writeLine(w io.Writer, v any) error {
	enc := json.NewEncoder(w)
	enc.SetEscapeHTML(false)
	return enc.Encode(v)
}

// The structures below give the keys their order.

type jsonRingDown struct {
	Schema     string            `json:"schema"`
	Status     decay.Status      `json:"status"`
	File       *string           `json:"file"`
	SHA256     *string           `json:"sha256"`
	Device     *string           `json:"device"`
	Channel    *string           `json:"channel"`
	Unit       *string           `json:"unit"`
	Samples    int               `json:"samples"`
	Interval   number            `json:"interval_s"`
	Start      number            `json:"start_s"`
	Model      *string           `json:"model"`
	Quantities *jsonQuantities   `json:"quantities"`
	Decays     []jsonDecay       `json:"decays"`
	Modes      []jsonMode        `json:"modes,omitempty"`
	Readings   jsonReadings      `json:"readings"`
	Circuit    *jsonCircuit      `json:"circuit,omitempty"` // with a bench file
	Limits     *jsonLimits       `json:"limits,omitempty"`  // with limits in it
	Findings   []capture.Finding `json:"findings"`
}

type jsonQuantities struct {
	DampedFrequency  quantity.Quantity `json:"damped_frequency_hz"`
	NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	TimeConstant     quantity.Quantity `json:"time_constant_s"`
	DecayRate        quantity.Quantity `json:"decay_rate_per_s"`
	Q                quantity.Quantity `json:"q"`
	DampingRatio     quantity.Quantity `json:"damping_ratio"`
	LogDecrement     quantity.Quantity `json:"log_decrement"`
	Bandwidth        quantity.Quantity `json:"bandwidth_hz"`
}

type jsonDecay struct {
	From        number              `json:"from_s"`
	To          number              `json:"to_s"`
	Cycles      number              `json:"cycles"`
	Quantities  jsonDecayQuantities `json:"quantities"`
	NoiseRMS    number              `json:"noise_rms"`
	ResidualRMS number              `json:"residual_rms"`
	SNR         number              `json:"snr_db"`
	AtStart     *jsonAtStart        `json:"at_start,omitempty"`
}

type jsonDecayQuantities struct {
	jsonQuantities
	Amplitude quantity.Quantity `json:"amplitude"`
	Phase     quantity.Quantity `json:"phase_rad"`
	Offset    quantity.Quantity `json:"offset"`
}

type jsonAtStart struct {
	DampedFrequency quantity.Quantity `json:"damped_frequency_hz"`
	Q               quantity.Quantity `json:"q"`
}

type jsonMode struct {
	Quantities jsonQuantities `json:"quantities"`
}

type jsonReadings struct {
	Crossings struct {
		DampedFrequency quantity.Quantity `json:"damped_frequency_hz"`
	} `json:"crossings"`
	Peaks struct {
		LogDecrement quantity.Quantity `json:"log_decrement"`
		Q            quantity.Quantity `json:"q"`
		TimeConstant quantity.Quantity `json:"time_constant_s"`
	} `json:"peaks"`
}

type jsonUnreadable struct {
	Schema string    `json:"schema"`
	Status string    `json:"status"`
	File   *string   `json:"file"`
	SHA256 *string   `json:"sha256"`
	Device *string   `json:"device"`
	Error  jsonError `json:"error"`
}

// A jsonError says why there is no result, and where in the file that is.
type jsonError struct {
	Message string `json:"message"`
	Line    *int   `json:"line"`
	Column  *int   `json:"column"`
}

func errorJSON(err error) jsonError {
	out := jsonError{Message: err.Error()}
	var e *capture.Error
	if errors.As(err, &e) {
		out.Line, out.Column = placeOrNull(e.Line), placeOrNull(e.Column)
	}
	return out
}

// A number is null in JSON when it is not finite.
type number float64

// MarshalJSON writes the number or null.
func (n number) MarshalJSON() ([]byte, error) {
	if x := float64(n); math.IsNaN(x) || math.IsInf(x, 0) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(n))
}

func (r *RingDown) json() *jsonRingDown {
	res, axis := r.Result, r.Channel.Axis
	out := &jsonRingDown{
		Schema: schemaRingDown, Status: r.Status(),
		File: orNull(r.file()), SHA256: orNull(r.sha256()), Device: orNull(r.Device),
		Channel: orNull(r.Channel.Name), Unit: orNull(r.Channel.Unit),
		Samples: axis.N, Interval: number(axis.Interval), Start: number(axis.Start),
		Model: orNull(string(res.Model)), Decays: []jsonDecay{}, Modes: []jsonMode{},
		Readings: readingsJSON(decay.Readings{DampedFrequency: unknown, LogDecrement: unknown, Q: unknown, TimeConstant: unknown}),
		Circuit:  circuitJSON(r.Circuit), Limits: limitsJSON(r.Limits),
		Findings: r.Findings(),
	}
	if r.refused() {
		return out
	}
	q := quantitiesJSON(res.Quantities)
	out.Quantities, out.Readings = &q, readingsJSON(res.Readings)
	for _, d := range res.Decays {
		out.Decays = append(out.Decays, decayJSON(d))
	}
	for _, m := range res.Modes {
		out.Modes = append(out.Modes, jsonMode{quantitiesJSON(m)})
	}
	return out
}

var unknown = quantity.Unknown("")

func quantitiesJSON(q *decay.Quantities) jsonQuantities {
	return jsonQuantities{q.DampedFrequency, q.NaturalFrequency, q.TimeConstant, q.DecayRate,
		q.Q, q.DampingRatio, q.LogDecrement, q.Bandwidth}
}

func decayJSON(d *decay.Decay) jsonDecay {
	out := jsonDecay{
		From: number(d.From), To: number(d.To), Cycles: number(d.Cycles),
		Quantities: jsonDecayQuantities{quantitiesJSON(&d.Quantities), d.Amplitude, d.Phase, d.Offset},
		NoiseRMS:   number(d.NoiseRMS), ResidualRMS: number(d.ResidualRMS), SNR: number(d.SNR),
	}
	if d.AtStart != nil {
		out.AtStart = &jsonAtStart{d.AtStart.DampedFrequency, d.AtStart.Q}
	}
	return out
}

func readingsJSON(r decay.Readings) (out jsonReadings) {
	out.Crossings.DampedFrequency = r.DampedFrequency
	out.Peaks.LogDecrement, out.Peaks.Q, out.Peaks.TimeConstant = r.LogDecrement, r.Q, r.TimeConstant
	return out
}

// unreadable says why there is no result; the schema is that of the result.
func unreadable(schema, file, sha256, device string, err error) *jsonUnreadable {
	return &jsonUnreadable{Schema: schema, Status: "unreadable", File: orNull(file), SHA256: orNull(sha256), Device: orNull(device), Error: errorJSON(err)}
}

func orNull(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

func placeOrNull(n int) *int {
	if n <= 0 {
		return nil
	}
	return &n
}
