package lti

import (
	"errors"
	"math/cmplx"
	"testing"

	"steadytick/internal/dd"
)

// TestAlgebra compares products and sums with complex128 arithmetic on the values.
func TestAlgebra(t *testing.T) {
	a := TF{Num: ascending(2, 3), Poles: reals(-1, -4), OriginPoles: 1}
	b := TF{Num: ascending(5), Poles: []dd.Complex{dd.C(-1, 0), dd.C(-0.5, 2), dd.C(-0.5, -2)}, OriginZeros: 1}
	sum, err := a.Add(b)
	if err != nil {
		t.Fatal(err)
	}
	if len(sum.Poles) != 4 || sum.OriginPoles != 1 {
		t.Errorf("the shared pole is counted %d times in %d, origin %d", len(a.Poles)+len(b.Poles)-len(sum.Poles)+1, len(sum.Poles), sum.OriginPoles)
	}
	for _, w := range []float64{0.01, 0.7, 1, 2.5, 300} {
		ga, gb := a.Freq(w), b.Freq(w)
		// float64 comparison of two values good to float64: 10 roundings
		tol := 10 * 0x1p-52
		if got := a.Mul(b).Freq(w); !(cmplx.Abs(got-ga*gb) <= tol*cmplx.Abs(ga*gb)) {
			t.Errorf("product at %g: %v, want %v", w, got, ga*gb)
		}
		if got := sum.Freq(w); !(cmplx.Abs(got-ga-gb) <= tol*(cmplx.Abs(ga)+cmplx.Abs(gb))) {
			t.Errorf("sum at %g: %v, want %v", w, got, ga+gb)
		}
	}
}

func TestAddDelays(t *testing.T) {
	a, b := servo(1), servo(2)
	a.DeadTime = dd.One
	if _, err := a.Add(b); !errors.Is(err, ErrDelay) {
		t.Errorf("different dead times: error %v, want ErrDelay", err)
	}
	b.DeadTime = dd.One
	c, err := a.Add(b)
	if err != nil || c.DeadTime != dd.One || c.Num[0].Float64() != 3 {
		t.Errorf("equal dead times: %+v, %v", c, err)
	}
	zero := Constant(dd.Zero, dd.Zero)
	if c, err := zero.Add(a); err != nil || c.DeadTime != dd.One {
		t.Errorf("zero plus a delay: %+v, %v", c, err)
	}
	minus := a.Scale(dd.New(-1))
	if c, err := a.Add(minus); err != nil || !c.IsZero() {
		t.Errorf("a − a is not the zero function: %+v, %v", c, err)
	}
}

// TestOriginInSum: 1/s − 1/(s(s+1)) = 1/(s+1), with a hidden mode at the origin.
func TestOriginInSum(t *testing.T) {
	c, err := TF{Num: ascending(1), OriginPoles: 1}.Add(servo(-1))
	if err != nil || c.OriginZeros != 1 || c.OriginPoles != 1 || len(c.Num) != 1 {
		t.Errorf("got %+v, %v", c, err)
	}
}

// TestFreqHeldServo: G(e^(jωT)) of the textbook plant, from its z coefficients.
func TestFreqHeldServo(t *testing.T) {
	g := heldServo(1, dd.One, 2)
	for _, w := range []float64{0.3, 1, 2, 3.1} {
		z := cmplx.Rect(1, w)
		want := (0.367879441171442*z + 0.264241117657115) / (z*z - 1.36787944117144*z + 0.367879441171442) / (z * z)
		// the published coefficients have 15 digits; z²−1.37z+0.37 loses one to cancellation at ω = 0.3
		if got := g.Freq(w); !(cmplx.Abs(got-want) <= 1e-13*cmplx.Abs(want)) {
			t.Errorf("at %g: %v, want %v", w, got, want)
		}
	}
}

// TestFreqFastTicks: at T = 1e-7 s the held servo is the continuous one within the
// hold's T/2 of lag and (ωT)²/24 of gain (Taylor expansion of the hold).
func TestFreqFastTicks(t *testing.T) {
	T := num(t, "1e-7")
	g, c := heldServo(1, T, 3), servo(1)
	for _, w := range []float64{1e-3, 1, 50} {
		got, want := g.Freq(w), c.Freq(w)*cmplx.Rect(1, -w*3.5e-7)
		if !(cmplx.Abs(got-want) <= 1e-13*cmplx.Abs(want)+w*w*1e-14*cmplx.Abs(want)) {
			t.Errorf("at %g: %v, want %v", w, got, want)
		}
	}
}

func TestFreqAtPole(t *testing.T) {
	if v := servo(1).Freq(0); !cmplx.IsInf(v) {
		t.Errorf("integrator at rest: %v", v)
	}
	g := TF{Num: ascending(1), Poles: []dd.Complex{dd.C(0, 1), dd.C(0, -1)}}
	if v := g.Freq(1); !cmplx.IsInf(v) {
		t.Errorf("undamped mode at its frequency: %v", v)
	}
	hidden := TF{Num: ascending(3), OriginPoles: 1, OriginZeros: 1}
	if v := hidden.Freq(0); v != 3 {
		t.Errorf("hidden integrator at rest: %v", v)
	}
}

func TestInside(t *testing.T) {
	T := num(t, "1e-7")
	for _, c := range []struct {
		x      dd.Complex
		period dd.Float
		want   bool
	}{
		{dd.C(-1e-9, 1), dd.Zero, true},
		{dd.C(0, 1), dd.Zero, false},
		{dd.C(-1e-9, 0), T, true},
		{dd.C(0, 1e-3), T, false},
		{dd.C(-1e-14, 1e-3), T, false}, // T|δ|² = 1e-13 beats 2e-14
		{dd.C(-1e-13, 1e-3), T, true},
		{dd.C(-2.1e7, 0), T, false}, // z = −1.1
	} {
		if got := Inside(c.x, c.period); got != c.want {
			t.Errorf("Inside(%v, %g) = %v", c.x.Complex128(), c.period.Float64(), got)
		}
	}
}

// Zeros kept beside a product are those of its numerator, and a double zero stays one.
func TestFindZeros(t *testing.T) {
	a := TF{Num: ascending(2, 3, 1), Poles: reals(-5, -6, -7)}.FindZeros() // −1, −2
	b := TF{Num: ascending(4, 1), Poles: reals(-8), Ticks: 2}              // −4
	f, err := a.Mul(b).Mul(b).Scale(dd.New(3)).factor()
	if err != nil || len(f.zeros) != 4 || f.lead != dd.New(3) {
		t.Fatalf("%v, %d zeros", err, len(f.zeros))
	}
	for i, want := range []float64{-1, -2, -4, -4} {
		found := false
		for _, z := range f.zeros {
			found = found || z.Im.Sign() == 0 && !(z.Re.Sub(dd.New(want)).Abs().Float64() > 1e-30) // roots of quadratics to the last digits
		}
		if !found {
			t.Errorf("zero %d: %g is not among %v", i, want, f.zeros)
		}
	}
	if z := (TF{}).FindZeros(); z.zeros != nil {
		t.Error("the zero function has zeros")
	}
}

func TestProductCoefficient(t *testing.T) {
	a, b := NewLaurent(-2, ascending(1, 2, 3, 4)), NewLaurent(1, ascending(5, 6, 7, 8, 9))
	all := a.Mul(b)
	for k := -3; k < 5; k++ {
		want, known := all.Coefficient(k)
		got, ok := a.ProductCoefficient(b, k)
		if ok != known || got != want {
			t.Errorf("x^%d: %v %v, want %v %v", k, got, ok, want, known)
		}
	}
}
