package capture

// Severity says how much a finding weighs.
type Severity string

// The severities. A warning makes a result doubtful, a fault refuses it.
const (
	Note    Severity = "note"
	Warning Severity = "warning"
	Fault   Severity = "fault"
)

// A Code names a kind of finding. Codes are stable: scripts depend on them.
type Code string

// The codes of findings, whoever makes them.
const (
	Clipped            Code = "clipped"
	DriveOn            Code = "drive-on"
	NoDecay            Code = "no-decay"
	Overdamped         Code = "overdamped"
	NearCritical       Code = "near-critical"
	FewCycles          Code = "few-cycles"
	ShortRecord        Code = "short-record"
	WeakSignal         Code = "weak-signal"
	CoarseLevels       Code = "coarse-levels"
	SparseSamples      Code = "sparse-samples"
	CoarseTime         Code = "coarse-time"
	UnevenTime         Code = "uneven-time"
	MissingSamples     Code = "missing-samples"
	SeveralDecays      Code = "several-decays"
	SecondMode         Code = "second-mode"
	AmplitudeDependent Code = "amplitude-dependent"
	BaselineDrift      Code = "baseline-drift"
	InterferingTone    Code = "interfering-tone"
	ColouredNoise      Code = "coloured-noise"
	ReadingsDisagree   Code = "readings-disagree"
	DecaysDisagree     Code = "decays-disagree"
	Loading            Code = "loading"
	SweptTooFast       Code = "swept-too-fast"
	SparseSweep        Code = "sparse-sweep"
	NarrowSweep        Code = "narrow-sweep"
	DriveSags          Code = "drive-sags"
	Outliers           Code = "outliers"
	IgnoredColumns     Code = "ignored-columns"
	OutlierSamples     Code = "outlier-samples"
)

// A Finding is a reason to distrust a result, or something worth knowing of
// how it came about. It is not an error: an error means there is no answer.
type Finding struct {
	Code     Code     `json:"code"`
	Severity Severity `json:"severity"`
	// Message is one sentence of what was seen, with its figure.
	Message string `json:"message"`
	// Remedy is one sentence of what to do about it.
	Remedy string `json:"remedy"`
}
