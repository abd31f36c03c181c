package study

import "encoding/json"

// Rate is the result of the rate command: which sample rates can work. JSON schema
// steadytick/rate/1.
type Rate struct {
	Schema string `json:"schema"`
	Loop   string `json:"loop"`
	Map    string `json:"map"` // of the controller, as the file or --map has it

	Verdict string `json:"verdict"` // which rates work, what to pick, what ends the window

	SearchedHz [2]float64 `json:"searched_hz"` // the range of rates looked at
	SearchNote string     `json:"search_note"` // where its ends come from

	Windows  []RateWindow `json:"windows"`   // "stable" first, then what the processor and the tick allow, then the requirements
	WindowHz []Interval   `json:"window_hz"` // rates that meet all of them
	Pick     *Pick        `json:"pick"`      // null when no rate works, or none that the timer can make
	PickNote string       `json:"pick_note"` // why there is none, "" otherwise
	Conflict *Conflict    `json:"conflict"`  // why no rate works; null when some do

	Candidates []Candidate `json:"candidates"`
	Maps       []MapWindow `json:"maps"` // every map side by side, on request

	ComputeEffect *ComputeEffect `json:"compute_effect"` // null without a lower bound
	Rules         []RuleOfThumb  `json:"rules_of_thumb"`
	Folding       []Folding      `json:"folding"`
	DelayLedger   []LedgerItem   `json:"delay_ledger"` // at the pick
	Warnings      []Warning      `json:"warnings"`
	Units         Units          `json:"units"`
	FileRateHz    float64        `json:"file_rate_hz"` // the rate of the loop file

	Curves   *RateCurves `json:"-"` // what the charts draw
	LoopFile string      `json:"-"`
	File     string      `json:"-"`
	Version  string      `json:"-"`
}

// Interval is a range of rates in Hz, ends included as far as the numbers go. An end that is not OK is
// open: the range goes on to the end of what was searched. JSON: [low, high] with null for an open end.
type Interval struct{ Low, High Figure }

// MarshalJSON writes [low, high].
func (v Interval) MarshalJSON() ([]byte, error) { return json.Marshal([2]Figure{v.Low, v.High}) }

// RateWindow is one requirement and the rates that meet it.
type RateWindow struct {
	Requirement string     `json:"requirement"` // "stable", "processor_load <= 40 %", or as the file has it
	Name        string     `json:"name"`        // of the metric; "stable", "runs" for rates at which the loop can run
	Intervals   []Interval `json:"intervals_hz"`
	Judged      bool       `json:"judged"`     // false: no figure to judge by, see note; it is then left out of the window
	Unchanged   bool       `json:"unchanged"`  // no rate changes the figure
	Value       Figure     `json:"value"`      // the figure where no rate changes it
	Best        Figure     `json:"best"`       // the best figure of any rate, where no rate meets the requirement
	BestHz      Figure     `json:"best_at_hz"` // and where that is
	Implied     bool       `json:"implied"`    // not written as a requirement: stable, runs, processor budget
	Note        string     `json:"note"`       // a sentence for the reader, "" for none
	Unit        string     `json:"unit"`       // of the figures
}

// Pick is the recommended rate.
type Pick struct {
	RateHz     float64        `json:"rate_hz"`
	PeriodS    float64        `json:"period_s"`
	Timer      *TimerSetting  `json:"timer"`       // null without a timer section
	Settings   []TimerSetting `json:"settings"`    // other settings around the pick, by rate
	WantedHz   float64        `json:"wanted_hz"`   // the round rate that the timer comes nearest to
	SlowestHz  Figure         `json:"slowest_hz"`  // slowest rate of the same interval of the window
	FastestHz  Figure         `json:"fastest_hz"`  // fastest one
	BindsBelow string         `json:"binds_below"` // the requirement that ends the interval below, "" for none
	BindsAbove string         `json:"binds_above"`
	Below      []Break        `json:"breaks_below"` // what breaks going down from the pick, nearest first
	Above      []Break        `json:"breaks_above"` // and going up
	Reason     string         `json:"reason"`       // how the pick was made, a sentence
}

// Break is a requirement that fails beyond a rate.
type Break struct {
	Requirement string  `json:"requirement"`
	RateHz      float64 `json:"rate_hz"`
	Factor      float64 `json:"factor"` // of the pick's rate
}

// TimerSetting is a pair of register values and the rate they make:
//
//	up:      clock/((prescaler + 1)·(reload + 1)·postscale)
//	center:  clock/(2·(prescaler + 1)·reload·postscale)
type TimerSetting struct {
	Prescaler int64   `json:"prescaler"` // register value
	Reload    int64   `json:"reload"`    // register value
	RateHz    float64 `json:"rate_hz"`
	WantedHz  float64 `json:"wanted_hz"` // the rate that was asked for
	ErrorPPM  float64 `json:"error_ppm"` // of the rate against the wanted one
}

// Candidate is a rate with every figure that the file has the data for.
type Candidate struct {
	RateHz  float64           `json:"rate_hz"`
	Map     string            `json:"map"`
	Metrics map[string]Figure `json:"metrics"` // by metric name, in base units
	Meets   bool              `json:"meets"`
	Fails   []string          `json:"fails"` // requirements that are not met
	Why     string            `json:"why"`   // "chosen", "file", "slowest", "fastest", "timer", "round": what the rate is
}

// Conflict tells why no rate works.
type Conflict struct {
	// Impossible are the requirements that no rate meets, whatever the others say.
	Impossible []string `json:"impossible"`
	// Sets are smallest sets of requirements, each of which some rate meets, but no rate all of them.
	Sets [][]string `json:"sets"`
	// Relaxations are the smallest changes of one limit that open the window.
	Relaxations []Relaxation `json:"relaxations"`
	Text        []string     `json:"text"` // the same as sentences
}

// Relaxation is how far one requirement must give way, the others as they are.
type Relaxation struct {
	Requirement string `json:"requirement"`
	Limit       Figure `json:"limit"`   // the limit in the file, base unit
	Enough      Figure `json:"enough"`  // the limit that opens the window; null: giving way on this one alone is not enough
	RateHz      Figure `json:"rate_hz"` // where the window then opens
	Unit        string `json:"unit"`
}

// MapWindow is the window under another controller map.
type MapWindow struct {
	Map        string       `json:"map"`
	WindowHz   []Interval   `json:"window_hz"`
	Windows    []RateWindow `json:"windows"`
	SlowestHz  Figure       `json:"slowest_hz"` // null: no rate works, or all do
	Against    Figure       `json:"against"`    // slowest rate over that of the file's map
	BindsBelow string       `json:"binds_below"`
	Note       string       `json:"note"`
}

// ComputeEffect is what a microsecond of compute time moves.
type ComputeEffect struct {
	LowerHzPerUS Figure `json:"lower_bound_hz_per_us"`
	LowerPercent Figure `json:"lower_bound_percent_per_us"`
	UpperHzPerUS Figure `json:"upper_bound_hz_per_us"` // by the processor's budget
	Note         string `json:"note"`
}

// RuleOfThumb is common practice beside the computed answer.
type RuleOfThumb struct {
	Rule    string   `json:"rule"`
	RangeHz Interval `json:"range_hz"`
	Says    string   `json:"against_computed"` // how it compares with the window
}

// Folding is where a frequency that the machine shakes with lands among the samples.
type Folding struct {
	Name        string    `json:"name"`
	At          string    `json:"at"` // input, output or sensor
	FrequencyHz float64   `json:"frequency_hz"`
	Lands       []Landing `json:"lands"`
	Warning     string    `json:"warning"` // at the pick, "" for none
}

// Landing is the folded frequency at one rate.
type Landing struct {
	RateHz          float64 `json:"rate_hz"`
	LandsHz         float64 `json:"lands_hz"`
	InsideBandwidth bool    `json:"inside_bandwidth"`
}

// RateCurves is what the report of rate draws; X in Hz.
type RateCurves struct {
	Bars     []RateBar    // a row a requirement, as Windows; open ends at the ends of the range
	Window   [][2]float64 // the intersection
	TimerHz  []float64    // rates that the timer can make, at most a few hundred, thinned when there are more
	OverRate []OverRate   // margins and errors over the rate
	Folding  []Curve      // where each disturbance lands, Hz over Hz
	Maps     []RateBar    // with every map: the window of each
}

// OverRate is one figure over the sample rate, a curve a map.
type OverRate struct {
	Metric string // name in requirements
	Unit   string
	Curves []Curve
	Limits []LimitLine
}

// LimitLine is a requirement on that figure.
type LimitLine struct {
	Op    string
	Value float64
}
