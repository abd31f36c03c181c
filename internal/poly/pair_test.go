package poly

import (
	"errors"
	"testing"

	"steadytick/internal/dd"

	"pgregory.net/rapid"
)

func TestPair(t *testing.T) {
	tiny := dd.Complex{Re: dd.New(-3), Im: dd.New(1e-31)}
	x := []dd.Complex{
		dd.C(-1, 2), tiny, {Re: dd.New(-1), Im: dd.New(-2).Add(dd.New(4e-31))},
		// Two real roots 1e-15 apart, noise 1e-17: they stay real.
		dd.C(-5, 1e-17), dd.C(-5-8.9e-16, -1e-17),
		// Noise above the distance: a pair.
		dd.C(-7, 1e-15), dd.C(-7, -1.5e-15),
	}
	radius := []float64{1e-30, 1e-30, 1e-30, 1e-15, 1e-15, 1e-14, 1e-14}
	out, moved := pair(x, radius)
	if !(moved <= 1) {
		t.Errorf("moved %v", moved)
	}
	want := []dd.Complex{
		{Re: dd.New(-1), Im: dd.New(2).Sub(dd.New(2e-31))}, {Re: dd.New(-1), Im: dd.New(-2).Add(dd.New(2e-31))},
		dd.C(-7, 1.25e-15), dd.C(-7, -1.25e-15), dd.C(-5, 0), dd.C(-5-8.9e-16, 0), dd.C(-3, 0),
	}
	if len(out) != len(want) {
		t.Fatal(out)
	}
	for i := range want {
		// 2e-31 and its neighbours are rounded: 2^-106 of 2 is 2.5e-32.
		if d := out[i].Sub(want[i]).Abs(); !(d <= 3e-32*want[i].Abs()) || out[i].Im.Sign() != want[i].Im.Sign() {
			t.Errorf("root %d = %v, want %v", i, out[i], want[i])
		}
	}
	// A root without a partner is not made real in silence.
	if _, moved := pair([]dd.Complex{dd.C(-1, 2), dd.C(-1, -2), dd.C(-4, 1)}, []float64{1e-30, 1e-30, 1e-30}); !(moved >= 1e29) {
		t.Errorf("a root at −4 + j was moved %v radii only", moved)
	}
	if e := (&AsymmetryError{2e20}); e.Error() == "" || errors.Is(e, ErrZeroPolynomial) {
		t.Error(e)
	}
}

// Exactly multiple roots, up to some twentyfold where two clusters fall together,
// are no error, and the set found is symmetric and complete. (How accurate: TestClusters.)
func TestMultipleRoots(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var r []dd.Complex
		for range rapid.IntRange(1, 3).Draw(t, "clusters") {
			re := -float64(rapid.IntRange(1, 8).Draw(t, "re")) / 4
			im := float64(rapid.IntRange(0, 8).Draw(t, "im")) / 4
			for range rapid.IntRange(1, 7).Draw(t, "multiplicity") {
				r = append(r, dd.C(re, im))
				if im != 0 {
					r = append(r, dd.C(re, -im))
				}
			}
		}
		p := FromRoots(r)
		x, err := p.Roots()
		if err != nil || len(x) != len(r) {
			t.Fatalf("%v: %d roots, %v", r, len(x), err)
		}
		checkSymmetry(t, x)
	})
}
