package reference

import (
	"math"
	"math/big"
	"strings"
	"testing"
)

// TestSetCoversTheGround holds the set against what it is for: at least 60 entries of 40
// loops, rates from 1 Hz to 10 MHz, types 0 to 3, orders 1 to 12, every map.
func TestSetCoversTheGround(t *testing.T) {
	entries := Load(t)
	if len(entries) < 60 {
		t.Errorf("%d entries, want 60 or more", len(entries))
	}
	loops, types, orders := map[string]bool{}, map[int]bool{}, map[int]bool{}
	slow, fast := new(big.Rat), big.NewRat(1, 1)
	var files strings.Builder
	for _, e := range entries {
		at := strings.Index(e.Name, " at ")
		loops[e.Name[:at]] = true
		types[e.Expect.Sampled.Type] = true
		orders[e.Order] = true
		if e.PeriodS.Cmp(slow) > 0 {
			slow = e.PeriodS.Rat
		}
		if e.PeriodS.Cmp(fast) < 0 {
			fast = e.PeriodS.Rat
		}
		files.WriteString(e.Loop)
	}
	if len(loops) < 40 {
		t.Errorf("%d loops, want 40 or more", len(loops))
	}
	for k := range 4 {
		if !types[k] {
			t.Errorf("no loop of type %d", k)
		}
	}
	if !orders[1] || !orders[12] {
		t.Errorf("orders %v, want 1 and 12 among them", orders)
	}
	if slow.Cmp(big.NewRat(1, 1)) != 0 || fast.Cmp(big.NewRat(1, 10_000_000)) != 0 {
		t.Errorf("periods from %s to %s s, want 1/10000000 to 1", fast, slow)
	}
	for _, m := range []string{"tustin", "prewarped", "matched", "forward", "backward", "hold", "triangle"} {
		if !strings.Contains(files.String(), "map: "+m+"\n") {
			t.Errorf("no loop with map %s", m)
		}
	}
}

// TestKnownFigures reads figures whose values are known from elsewhere: Ka = 36 by
// construction, margins of 1/(s(s+1)) at T = 1 s (recomputed with 50 digits).
func TestKnownFigures(t *testing.T) {
	find := func(name string) *Column {
		for _, e := range Load(t) {
			if e.Name == name {
				return e.Expect.Sampled
			}
		}
		t.Fatalf("no entry %q", name)
		return nil
	}
	near := func(name string, got Number, want, tol float64) {
		t.Helper()
		if !(math.Abs(got.Float64()-want) <= tol) {
			t.Errorf("%s: %v, want %v", name, got.Float64(), want)
		}
	}
	near("Ka", find("Ka of 36 at 1 MHz").Ka, 36, 0)
	c := find("integrator and lag at 1 Hz")
	near("crossover", c.CrossoverRadS, 0.771734028099, 0.6e-12)  // 12 decimals are given
	near("phase margin", c.PhaseMarginDeg, 30.3842728003, 1e-10) // 10 decimals are given
	if c.Kp.Value.Hi != math.Inf(1) || !c.Kp.IsInf() {
		t.Errorf("Kp %v, want +Inf", c.Kp)
	}
	if c.GainReductionDB.OK {
		t.Error("a null figure reads as applicable")
	}
}

func TestParseRefuses(t *testing.T) {
	for _, text := range []string{
		``, `[]`, `[{"name": "x"}]`, `[{"nme": "x"}]`,
		`[{"name": "x", "period_s": "1/0", "expect": {"sampled": {}}}]`,
		`[{"name": "x", "period_s": "1", "expect": {"sampled": {"kp": "12,5"}}}]`,
		`[{"name": "x", "period_s": "1", "expect": {"sampled": {"kp": 12.5}}}]`,
	} {
		if got, err := parse([]byte(text)); err == nil {
			t.Errorf("%s: read as %v", text, got)
		}
	}
}
