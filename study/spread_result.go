package study

import "encoding/json"

// Spread is the result of the spread command: what is left of the loop's metrics when the symbols are what the
// supplier delivers. JSON schema steadytick/spread/1.
type Spread struct {
	Schema  string `json:"schema"`
	Loop    string `json:"loop"`
	Verdict string `json:"verdict"` // the yield, what fails most, which symbol drives it

	PeriodS float64 `json:"period_s"`
	Map     string  `json:"map"` // of the controller, as the file or --map has it

	Draw      string         `json:"draw"`   // uniform, normal or corners
	Trials    int64          `json:"trials"` // how many were run
	Seed      uint64         `json:"seed"`   // of the draws; corners need none
	Simulated bool           `json:"simulated"`
	Symbols   []SpreadSymbol `json:"symbols"` // those drawn, in the order of the file

	Yield        SpreadYield         `json:"yield"`
	Requirements []SpreadRequirement `json:"requirements"` // "stable" first, then what the processor allows, then those of the file
	Metrics      []SpreadMetric      `json:"metrics"`
	Corners      *SpreadCorners      `json:"corners"`      // null with more than 10 symbols, see corners_note
	CornersNote  string              `json:"corners_note"` // why there are none
	Failures     []SpreadFailure     `json:"failures"`     // of the trials that could not be analysed

	StepPercent float64   `json:"sensitivity_step_percent"` // to either side of the nominal value, for the central differences
	Warnings    []Warning `json:"warnings"`
	Units       Units     `json:"units"`

	Curves   *SpreadCurves `json:"-"` // what the charts draw
	LoopFile string        `json:"-"`
	File     string        `json:"-"`
	Version  string        `json:"-"`
}

// SpreadSymbol is a symbol with a tolerance.
type SpreadSymbol struct {
	Name    string  `json:"name"`
	Nominal float64 `json:"nominal"`
	Percent float64 `json:"spread_percent"` // to either side
	Low     float64 `json:"low"`            // nominal·(1 − spread)
	High    float64 `json:"high"`
}

// Counted is how many trials did something, with the share and its 95 % interval; of corners, which are no
// sample, there is no interval.
type Counted struct {
	Met      int64     `json:"met"`
	Of       int64     `json:"of"`
	Percent  float64   `json:"percent"`
	Interval [2]Figure `json:"interval_percent"` // Wilson's, see wilson
	Required Figure    `json:"required_percent"` // null: none was asked for
	Reached  *bool     `json:"reached"`          // null: none was asked for
}

// SpreadYield is the share of trials that are stable and meet every requirement.
type SpreadYield struct {
	Counted
	Stable   int64 `json:"stable"`
	Unstable int64 `json:"unstable"`
	Failed   int64 `json:"failed"` // could not be analysed
}

// SpreadRequirement is one requirement over the trials.
type SpreadRequirement struct {
	Requirement string `json:"requirement"` // "stable", or as the file has it
	Name        string `json:"name"`        // of the metric; "stable"
	Op          string `json:"op"`
	Limit       Figure `json:"limit"` // base unit; null for stable
	Unit        string `json:"unit"`
	Implied     bool   `json:"implied"` // not written as a requirement
	Judged      bool   `json:"judged"`  // false: no trial has a figure to judge by; it is then left out of the yield
	Note        string `json:"note"`

	Nominal    Figure     `json:"nominal"`  // the figure of the loop as written; of stable the decay of the slowest mode, 1/s
	Met        int64      `json:"met"`      // trials
	Missed     int64      `json:"missed"`   // with a figure beyond the limit, or unstable or failed
	Unjudged   int64      `json:"unjudged"` // without a figure though stable; they do not count as met
	Percent    float64    `json:"percent"`  // yield of this requirement alone
	Interval   [2]Figure  `json:"interval_percent"`
	Worst      *WorstCase `json:"worst_trial"`  // least slack; null when no trial could be analysed
	Corner     *WorstCase `json:"worst_corner"` // null without corners
	CornersMet Figure     `json:"corners_met"`  // how many of the corners meet it
}

// WorstCase is a trial or a corner with its symbols.
type WorstCase struct {
	Trial   int64        `json:"trial"` // number of the trial, or of the corner: from 1
	Stable  bool         `json:"stable"`
	Value   Figure       `json:"value"`
	Symbols SymbolValues `json:"symbols"`
	Levels  string       `json:"levels"` // of a corner, "L high, C low"; "" for a trial
}

// SymbolValues are symbols with values, an object in JSON, in the order of the file.
type SymbolValues []SymbolValue

// SymbolValue is one of them.
type SymbolValue struct {
	Name  string
	Value float64
}

// MarshalJSON writes an object.
func (s SymbolValues) MarshalJSON() ([]byte, error) { return s.append(nil), nil }

func (s SymbolValues) append(b []byte) []byte {
	b = append(b, '{')
	for i, v := range s {
		if i > 0 {
			b = append(b, ',')
		}
		name, _ := json.Marshal(v.Name) // a name is letters, digits and _
		b = append(append(b, name...), ':')
		b = appendFigure(b, Fig(v.Value))
	}
	return append(b, '}')
}

// SpreadMetric is one figure over the trials.
type SpreadMetric struct {
	Name    string `json:"name"`
	Unit    string `json:"unit"`
	Nominal Figure `json:"nominal"`

	Count    int64 `json:"count"`    // trials with a finite figure, of which the statistics are made
	Infinite int64 `json:"infinite"` // trials in which it is infinite
	Without  int64 `json:"without"`  // trials without it: unstable, failed, or there is no such figure

	Mean      Figure           `json:"mean"`
	Deviation Figure           `json:"standard_deviation"` // of the sample, n − 1
	Min       Figure           `json:"min"`
	Max       Figure           `json:"max"`
	Quantiles SpreadQuantiles  `json:"quantiles"`
	Histogram *SpreadHistogram `json:"histogram"` // null where the figure does not change

	Worse  Worse      `json:"worse"`          // the direction in which it gets worse, "" for neither
	Lowest *WorstCase `json:"lowest_trial"`   // infinite figures included
	Top    *WorstCase `json:"highest_trial"`  //
	LowCor *WorstCase `json:"lowest_corner"`  // null without corners
	TopCor *WorstCase `json:"highest_corner"` //

	Sensitivities []Sensitivity `json:"sensitivities"` // a symbol each, in the order of the file
}

// SpreadQuantiles are in the unit of the metric.
type SpreadQuantiles struct {
	P1  Figure `json:"p1"`
	P5  Figure `json:"p5"`
	P25 Figure `json:"p25"`
	P50 Figure `json:"p50"`
	P75 Figure `json:"p75"`
	P95 Figure `json:"p95"`
	P99 Figure `json:"p99"`
}

// SpreadHistogram has bars of equal width.
type SpreadHistogram struct {
	From   float64 `json:"from"`
	To     float64 `json:"to"`
	Counts []int64 `json:"counts"`
}

// Sensitivity is what one symbol does to one metric.
type Sensitivity struct {
	Symbol     string `json:"symbol"`
	PerPercent Figure `json:"per_percent"`      // change of the metric with 1 % more of the symbol: d metric/d ln symbol over 100, at nominal
	OverSpread Figure `json:"over_spread"`      // the same times the spread in per cent
	Rank       Figure `json:"rank_correlation"` // over the trials, −1 to 1
}

// SpreadCorners are the combinations of the ends of the spreads.
type SpreadCorners struct {
	Counted
	Stable   int64 `json:"stable"`
	Unstable int64 `json:"unstable"`
	Failed   int64 `json:"failed"`
}

// SpreadFailure is a reason why trials could not be analysed.
type SpreadFailure struct {
	Reason string `json:"reason"`
	Count  int64  `json:"count"`
	First  int64  `json:"first_trial"`
}

// SpreadCurves is what the report of spread draws.
type SpreadCurves struct {
	StepInput string       // "step 0.05 V"
	Step      []Curve      // y over s: nominal, worst trial, worst corner, with the reference first
	Binding   string       // the requirement that the worst ones belong to
	Histogram []SpreadBars // as Spread.Metrics
}

// SpreadBars is one histogram with the limits on its axis.
type SpreadBars struct {
	Metric  string
	Unit    string
	Nominal Figure
	Limits  []LimitLine
	Bars    Curve // a staircase: Y[i] trials from X[i] to X[i+1]
}
