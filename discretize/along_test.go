package discretize

import (
	"errors"
	"math/big"
	"testing"

	"steadytick/internal/dd"
)

// Instants along a tick are those of Hold with the exact delay: the two differ by the rounding of the delay only, 1e-32
// of the tick, which moves a coefficient by less than 1e-28 of the largest.
func TestAlong(t *testing.T) {
	m := model(t, []int64{3, 9}, []int64{80, 860, 423, 40}) // (3 + 9s)/(80 + 860s + 423s² + 40s³)

	p, err := Prepare(m)
	if err != nil {
		t.Fatal(err)
	}
	T, from, to := big.NewRat(1, 50), big.NewRat(1, 7000), big.NewRat(-1, 90)
	a, err := p.At(T)
	if err != nil {
		t.Fatal(err)
	}
	// from − x·(from − to) passes 0: whole ticks lie between.
	if _, err := a.Along(from, to, []float64{0.5}); !errors.As(err, new(*DelayError)) {
		t.Errorf("an interval over a whole tick gives %v", err)
	}
	to = big.NewRat(0, 1)
	x := []float64{0.125, 0.5, 0.9375}
	got, err := a.Along(from, to, x)
	if err != nil {
		t.Fatal(err)
	}
	for i, f := range x {
		at := new(big.Rat).SetFloat64(f)
		at.Mul(at, new(big.Rat).Sub(to, from)).Add(at, from)
		want, err := p.Hold(T, at)
		if err != nil {
			t.Fatal(err)
		}
		if got[i].Ticks != want.TF.Ticks || len(got[i].Num) != len(want.TF.Num) || len(got[i].Poles) != len(want.TF.Poles) {
			t.Fatalf("x = %g: another structure", f)
		}
		largest := 0.0
		for _, c := range want.TF.Num {
			largest = max(largest, c.Abs().Float64())
		}
		for k, c := range want.TF.Num {
			if d := got[i].Num[k].Sub(c).Abs(); !(d.Cmp(dd.New(1e-28*largest)) <= 0) {
				t.Errorf("x = %g: coefficient %d off by %g", f, k, d.Float64())
			}
		}
	}
}
