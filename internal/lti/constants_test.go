package lti

import (
	"math"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// The table of static error constants against type (any control textbook, e.g.
// Ogata, Modern Control Engineering; from memory).
func TestErrorConstantsTable(t *testing.T) {
	inf := dd.New(math.Inf(1))
	k := dd.New(7)
	for _, c := range []struct {
		start      int
		kp, kv, ka dd.Float
	}{
		{1, dd.Zero, dd.Zero, dd.Zero},
		{0, k, dd.Zero, dd.Zero},
		{-1, inf, k, dd.Zero},
		{-2, inf, inf, k},
		{-3, inf, inf, inf},
	} {
		if got, want := ErrorConstants(c.start, k), (Constants{-c.start, c.kp, c.kv, c.ka}); got != want {
			t.Errorf("start %d: got %v, want %v", c.start, got, want)
		}
	}
	if got := ErrorConstants(-3, k.Neg()).Position; got != inf.Neg() {
		t.Errorf("negative gain: Kp %v", got)
	}
	if got := ErrorConstants(0, dd.Zero); got != (Constants{}) {
		t.Errorf("zero loop: %v", got)
	}
}

// 6(x + 5)/(x²·(x + 3)·(x² + 2x + 5)·(x − 2)): 30/(3·5·(−2)) = −1.
func TestLeading(t *testing.T) {
	g := TF{
		Num:         poly.Poly{dd.New(30), dd.New(6)},
		Poles:       []dd.Complex{dd.C(-3, 0), dd.C(-1, 2), dd.C(-1, -2), dd.C(2, 0)},
		OriginPoles: 3, OriginZeros: 1,
	}
	start, lead := Leading(g)
	// five roundings of Eps each
	if diff := lead.Sub(dd.New(-1)).Abs().Float64(); start != -2 || !(diff <= 8*dd.Eps) {
		t.Errorf("start %d, lead %v", start, lead)
	}
	if start, lead := Leading(TF{}); start != 0 || lead.Sign() != 0 {
		t.Errorf("zero function: %d, %v", start, lead)
	}
}
