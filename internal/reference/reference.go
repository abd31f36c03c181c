// Package reference reads testdata/reference/loops.json for tests: invented loops
// with their figures from 260-digit arithmetic. What each figure means stands in
// generate.py beside the file.
//
// Conventions: numbers carry 30 digits and are kept as double-double; the unit is in
// the name, else it is the loop's own; lists of poles are sorted by falling real part,
// then rising imaginary part.
package reference

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"math/big"
	"os"
	"path/filepath"
	"runtime"
	"testing"

	"steadytick/internal/dd"
)

// Number is one figure. OK is false where it is not applicable (null); an infinite
// figure has ±Inf in Value.Hi.
type Number struct {
	Value dd.Float
	OK    bool
}

// Float64 is the figure rounded to float64; NaN when it is not applicable.
func (n Number) Float64() float64 {
	if !n.OK {
		return math.NaN()
	}
	return n.Value.Float64()
}

// IsInf tells whether the figure is +Inf or −Inf.
func (n Number) IsInf() bool { return n.OK && math.IsInf(n.Value.Hi, 0) }

// UnmarshalJSON reads a decimal string, "inf", "-inf" or null.
func (n *Number) UnmarshalJSON(b []byte) error {
	if string(b) == "null" {
		*n = Number{}
		return nil
	}
	var s string
	if err := json.Unmarshal(b, &s); err != nil {
		return err
	}
	switch s {
	case "inf":
		*n = Number{dd.New(math.Inf(1)), true}
		return nil
	case "-inf":
		*n = Number{dd.New(math.Inf(-1)), true}
		return nil
	}
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		return fmt.Errorf("%q is not a number", s)
	}
	*n = Number{dd.FromRat(r), true}
	return nil
}

// Exact is a rational figure such as the period, exact.
type Exact struct{ *big.Rat }

// UnmarshalJSON reads "3/2000".
func (e *Exact) UnmarshalJSON(b []byte) error {
	var s string
	if err := json.Unmarshal(b, &s); err != nil {
		return err
	}
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		return fmt.Errorf("%q is not a rational number", s)
	}
	e.Rat = r
	return nil
}

// Entry is one loop at one rate.
type Entry struct {
	Name       string `json:"name"`
	Loop       string `json:"loop"`  // the loop file's text
	Order      int    `json:"order"` // of plant, sensor and controller, delay not counted
	PeriodS    Exact  `json:"period_s"`
	LoopDelayS Exact  `json:"loop_delay_s"`
	DeadTimeS  Exact  `json:"dead_time_s"`
	Expect     struct {
		Continuous *Column `json:"continuous"` // nil for a controller given in z
		Sampled    *Column `json:"sampled"`
	} `json:"expect"`
}

// Pole is a point of the s plane, or of the z plane in Column.PolesZ.
type Pole struct{ Re, Im dd.Float }

// UnmarshalJSON reads [re, im].
func (p *Pole) UnmarshalJSON(b []byte) error {
	var parts [2]Number
	if err := json.Unmarshal(b, &parts); err != nil {
		return err
	}
	p.Re, p.Im = parts[0].Value, parts[1].Value
	return nil
}

// Column holds the figures of the continuous or the sampled loop.
type Column struct {
	Stable         bool      `json:"stable"`
	Type           int       `json:"type"`
	Kp             Number    `json:"kp"`
	Kv             Number    `json:"kv"`
	Ka             Number    `json:"ka"`
	TrackingSeries [4]Number `json:"tracking_series"`
	LoopSeries     [4]Number `json:"loop_series"`

	// Poles are the closed-loop poles in s, ln(z)/T in the sampled column; the dominant
	// ones only when PolesComplete is false.
	Poles         []Pole `json:"poles"`
	PolesComplete bool   `json:"poles_complete"`
	PoleCount     *int   `json:"pole_count"` // nil unless complete
	PolesZ        []Pole `json:"poles_z"`    // sampled column, complete

	GainCrossings   []GainCrossing  `json:"gain_crossings"`
	PhaseCrossings  []PhaseCrossing `json:"phase_crossings"` // the ones next to |L| = 1, not all of a loop with long delay
	PhaseMarginDeg  Number          `json:"phase_margin_deg"`
	GainMarginDB    Number          `json:"gain_margin_db"`
	GainReductionDB Number          `json:"gain_reduction_db"`
	ModulusMargin   Number          `json:"modulus_margin"`
	DelayMarginS    Number          `json:"delay_margin_s"`
	CrossoverRadS   Number          `json:"crossover_rad_s"`
	BandwidthRadS   Number          `json:"bandwidth_rad_s"`

	Steady *Steady `json:"steady"` // nil when unstable
	Sine   *Sine   `json:"sine"`   // nil without a sine input, or unstable
}

// GainCrossing is a frequency with |L| = 1; MarginDeg is arg L + 180° in (−180°, 180°].
type GainCrossing struct {
	RadS      Number `json:"rad_s"`
	MarginDeg Number `json:"margin_deg"`
}

// PhaseCrossing is a frequency where L is real and negative, 0 and π/T included; Gain is |L|.
type PhaseCrossing struct {
	RadS Number `json:"rad_s"`
	Gain Number `json:"gain"`
}

// Steady holds the steady errors for r = 1, t and t²/2 and for a unit load step.
type Steady struct {
	Step     SteadyError `json:"step"`
	Ramp     SteadyError `json:"ramp"`
	Parabola SteadyError `json:"parabola"`
	LoadStep struct {
		TrackingError Number `json:"tracking_error"`
	} `json:"load_step"`
}

// SteadyError is the steady error for one input of size 1. TrackingError and LoopError are
// infinite where the error grows; Asymptote is g0, g1, g2 of g0 + g1·t + g2·t² at the ticks. Ripple
// and WorstError, over a whole tick, are of the sampled column, ramp and parabola, bounded errors only.
type SteadyError struct {
	TrackingError Number    `json:"tracking_error"`
	LoopError     Number    `json:"loop_error"`
	Asymptote     [3]Number `json:"asymptote"`
	Ripple        Number    `json:"ripple"`
	WorstError    Number    `json:"worst_error"`
}

// Sine is the steady tracking error at the ticks for r = sin(ωt): Amplitude·sin(ωt + PhaseDeg).
type Sine struct {
	FrequencyRadS Number `json:"frequency_rad_s"`
	Amplitude     Number `json:"amplitude"`
	PhaseDeg      Number `json:"phase_deg"`
}

// Load reads the set and ends the test when it cannot be read, holds a key that this
// package does not know, or is empty.
func Load(t testing.TB) []Entry {
	t.Helper()
	_, here, _, ok := runtime.Caller(0)
	if !ok {
		t.Fatal("the place of this source file is not known")
	}
	path := filepath.Join(filepath.Dir(here), "..", "..", "testdata", "reference", "loops.json")
	if _, err := os.Stat(path); err != nil { // built with -trimpath: tests run in their package's folder
		path = filepath.Join("..", "..", "testdata", "reference", "loops.json")
	}
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	entries, err := parse(b)
	if err != nil {
		t.Fatalf("%s: %v", path, err)
	}
	return entries
}

func parse(b []byte) ([]Entry, error) {
	var entries []Entry
	d := json.NewDecoder(bytes.NewReader(b))
	d.DisallowUnknownFields()
	if err := d.Decode(&entries); err != nil {
		return nil, err
	}
	if len(entries) == 0 {
		return nil, fmt.Errorf("no entries")
	}
	for _, e := range entries {
		if e.Expect.Sampled == nil || e.PeriodS.Rat == nil || e.PeriodS.Sign() <= 0 {
			return nil, fmt.Errorf("%s: no sampled column or no period", e.Name)
		}
	}
	return entries, nil
}
