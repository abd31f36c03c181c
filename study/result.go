package study

import (
	"encoding/json"
	"math"
)

// Figure is a number of a result that may be infinite or not applicable. JSON: a number,
// "inf", "-inf" or null.
type Figure struct {
	Value float64
	OK    bool // false: not applicable, null
}

// Fig returns v as a figure; NaN becomes not applicable.
func Fig(v float64) Figure { return Figure{Value: v, OK: !math.IsNaN(v)} }

// MarshalJSON writes a number that reads back exactly, "inf", "-inf" or null.
func (f Figure) MarshalJSON() ([]byte, error) {
	switch {
	case !f.OK || math.IsNaN(f.Value):
		return []byte("null"), nil
	case math.IsInf(f.Value, 1):
		return []byte(`"inf"`), nil
	case math.IsInf(f.Value, -1):
		return []byte(`"-inf"`), nil
	}
	return json.Marshal(f.Value)
}

// Compare is the result of the main job. JSON schema steadytick/compare/1.
type Compare struct {
	Schema       string        `json:"schema"`
	Loop         string        `json:"loop"`
	PeriodS      float64       `json:"period_s"`
	LoopDelayS   float64       `json:"loop_delay_s"`
	Continuous   *Column       `json:"continuous"` // null when the controller is digital only
	Sampled      *Column       `json:"sampled"`
	AsBuilt      *AsBuilt      `json:"as_built"` // null when the file declares no hardware, or the loop is unstable
	DelayLedger  []LedgerItem  `json:"delay_ledger"`
	Requirements []Requirement `json:"requirements"`
	Degrade      []DegradeRow  `json:"degrade"`
	Maps         []MapNote     `json:"maps"`
	Warnings     []Warning     `json:"warnings"`

	Verdict string `json:"verdict"` // one sentence that names the culprit
	Units   Units  `json:"units"`

	// Curves are what the charts draw; not part of the JSON.
	Curves *Curves `json:"-"`
	// LoopFile is the text of the loop file, for the foot of the report.
	LoopFile string `json:"-"`
	File     string `json:"-"`
	Version  string `json:"-"`
}

// Units are the loop's own unit names.
type Units struct {
	Output string `json:"output"`
	Effort string `json:"effort"`
}

// Column is one of the two columns.
type Column struct {
	Stable               bool      `json:"stable"`
	Type                 int       `json:"type"`
	PositionConstant     Figure    `json:"position_constant"`
	VelocityConstant     Figure    `json:"velocity_constant"`
	AccelerationConstant Figure    `json:"acceleration_constant"`
	TrackingSeries       [4]Figure `json:"tracking_series"`
	LoopSeries           [4]Figure `json:"loop_series"`
	Steady               []Steady  `json:"steady"`

	PhaseMarginDeg  Figure `json:"phase_margin_deg"`
	GainMarginDB    Figure `json:"gain_margin_db"`
	GainReductionDB Figure `json:"gain_reduction_db"`
	ModulusMargin   Figure `json:"modulus_margin"`
	DelayMarginS    Figure `json:"delay_margin_s"`
	CrossoverRadS   Figure `json:"crossover_rad_s"`
	BandwidthRadS   Figure `json:"bandwidth_rad_s"`
	JitterMarginS   Figure `json:"jitter_margin_s"`

	// Of the sampled column, from the words and the noise that the file declares.
	EffortNoise Figure `json:"effort_noise"`
	OutputNoise Figure `json:"output_noise"`
	StuckError  Figure `json:"stuck_error"`

	GainCrossings  []Crossing `json:"gain_crossings"`  // |L| = 1
	PhaseCrossings []Crossing `json:"phase_crossings"` // arg L = −180°

	Poles              PoleList  `json:"poles"`
	EquivalentPoles    PoleList  `json:"equivalent_poles_rad_s,omitempty"`
	Transient          Transient `json:"transient"`
	StabilityByPoles   bool      `json:"stable_by_poles"`
	StabilityByNyquist bool      `json:"stable_by_nyquist"`
}

// PoleList is a list of points [re, im]. A sampled pole at z = 0 has the equivalent −Inf,
// which JSON writes "-inf".
type PoleList [][2]float64

// MarshalJSON writes pairs of figures.
func (p PoleList) MarshalJSON() ([]byte, error) {
	out := make([][2]Figure, len(p))
	for i, z := range p {
		out[i] = [2]Figure{Fig(z[0]), Fig(z[1])}
	}
	return json.Marshal(out)
}

// Crossing is one crossing of the loop frequency response.
type Crossing struct {
	RadS      float64 `json:"rad_s"`
	Gain      float64 `json:"gain"`
	PhaseDeg  float64 `json:"phase_deg"`  // of L, in (−180, 180]
	MarginDeg Figure  `json:"margin_deg"` // gain crossings
	MarginDB  Figure  `json:"margin_db"`  // phase crossings
}

// Steady is the steady error for one input.
type Steady struct {
	Input         string     `json:"input"`
	Size          Figure     `json:"size"`
	TrackingError Figure     `json:"tracking_error"`
	LoopError     Figure     `json:"loop_error"`
	Asymptote     *[3]Figure `json:"asymptote"` // g0 + g1 t + g2 t²; null for sine
	Ripple        Figure     `json:"ripple"`
	WorstError    Figure     `json:"worst_error"`         // worst magnitude at and between ticks
	PhaseDeg      Figure     `json:"phase_deg"`           // sine: phase of the error against r
	FrequencyRadS Figure     `json:"frequency_rad_s"`     // sine
	EndError      Figure     `json:"end_error"`           // move, file: tracking error when the move ends
	EndTimeS      Figure     `json:"end_time_s"`          // move, file
	PeakError     Figure     `json:"peak_tracking_error"` // move, file
	RMSError      Figure     `json:"rms_tracking_error"`  // move, file
	AtLimit       bool       `json:"effort_at_limit"`     // the simulation ends with the effort at a limit: steady figures are of the linear loop
}

// Transient holds the step figures (IEEE Std 181).
type Transient struct {
	OvershootPercent Figure `json:"overshoot_percent"`
	RiseTimeS        Figure `json:"rise_time_s"`
	SettlingTimeS    Figure `json:"settling_time_s"`
	PeakTimeS        Figure `json:"peak_time_s"`
	PeakEffort       Figure `json:"peak_effort"`
	RecoveryTimeS    Figure `json:"recovery_time_s"` // after an effort at its limit, 0 when it never is: see sim.Figures; null without limits
}

// LedgerItem is one contribution to lag around the loop.
type LedgerItem struct {
	Item    string  `json:"item"`
	Seconds float64 `json:"seconds"`
	Degrees Figure  `json:"degrees"` // at the sampled crossover
}

// Requirement is one requirement of the loop file and whether it is met.
type Requirement struct {
	Name  string  `json:"name"`
	Op    string  `json:"op"`
	Limit float64 `json:"limit"`
	Value Figure  `json:"value"`
	Met   *bool   `json:"met"`  // null: cannot be judged
	From  string  `json:"from"` // the column that the value is of: "sampled", or "as built" where that is worse
	Unit  string  `json:"unit"`
}

// Warning is a typed remark.
type Warning struct {
	Code string `json:"code"`
	Text string `json:"text"`
}

// DegradeRow is one line of the degradation table: one input, one variant of the loop.
type DegradeRow struct {
	Input       string `json:"input"`
	Variant     string `json:"variant"` // "continuous", "2x rate", "half rate", "no delay", …
	PeriodS     Figure `json:"period_s"`
	LoopDelayS  Figure `json:"loop_delay_s"`
	Ran         bool   `json:"ran"` // false: it cannot run, see note
	Stable      bool   `json:"stable"`
	PeakError   Figure `json:"peak_tracking_error"`
	RMSError    Figure `json:"rms_tracking_error"`
	SteadyError Figure `json:"steady_tracking_error"`
	Note        string `json:"note"` // why there are no figures, or what to know about them
}

// Curve is a polyline; X and Y have equal length and hold finite numbers only.
type Curve struct {
	Name string
	X, Y []float64
	Step bool // held staircase: Y[i] from X[i] to X[i+1]
	Dots bool // values at the ticks, not joined
}

// InputCurves are the time responses for one input.
type InputCurves struct {
	Input    string  // kind with its size, e.g. "ramp 2 rad/s"
	Response []Curve // r, continuous y, sampled y of each variant
	Error    []Curve // tracking error: continuous, sampled variants, and dots at the ticks
	Added    []Curve // y of the continuous loop less y of each sampled variant: the error that sampling adds
	Effort   []Curve // continuous u, sampled u as a staircase
}

// Curves is everything the report draws. Times in s, frequencies in rad/s.
type Curves struct {
	Inputs []InputCurves

	// Frequency response of L, both columns.
	GainDB, PhaseDeg []Curve
	NyquistRadS      float64 // half the sample rate in rad/s

	// Closed-loop poles as equivalent poles in the s plane, both columns: X = re, Y = im.
	Poles []Curve

	// Over the sample rate (X in Hz): margins and steady errors.
	PhaseMarginOverRate, ErrorOverRate []Curve
	// RateWindow: for each requirement and "stable" the intervals of rates that meet it among the rates tried.
	RateWindow []RateBar
	RateHz     float64 // the loop's own rate
}

// RateBar is one row of the rate window chart.
type RateBar struct {
	Requirement string
	Intervals   [][2]float64 // Hz
}
