package sim

import (
	"math"
	"testing"

	"steadytick/internal/dd"
)

func squareOf(rows ...[]float64) square {
	s := square{n: len(rows)}
	for _, r := range rows {
		for _, v := range r {
			s.v = append(s.v, dd.New(v))
		}
	}
	return s
}

// Closed forms of e^{Mh} − I; entries to 4e-16 of their size: the result is correct to more
// than float64 and is rounded once, the expected value by the library's last place or two.
func TestExpm1ClosedForms(t *testing.T) {
	for _, h := range []float64{1e-7, 1e-3, 0.3, 5} {
		p, q, w := -3e5, -0.2, 41.0
		e := expm1(squareOf([]float64{p, 0, 0}, []float64{1, q, 0}, []float64{0, 0, 0.1}), dd.New(h))
		same := func(what string, got dd.Float, want float64) {
			t.Helper()
			near(t, what, got.Float64(), want, 4e-16*math.Abs(want))
		}
		same("fast", e.v[0], math.Expm1(p*h))
		same("slow", e.v[4], math.Expm1(q*h))
		same("growing", e.v[8], math.Expm1(0.1*h))
		// The coupling is the divided difference (e^{ph} − e^{qh})/(p − q).
		near(t, "coupling", e.v[3].Float64(), (math.Expm1(p*h)-math.Expm1(q*h))/(p-q), 1e-14*math.Abs(e.v[3].Hi))

		c := expm1(squareOf([]float64{0, w}, []float64{-w, 0}), dd.New(h))
		near(t, "cos − 1", c.v[0].Float64(), -2*math.Pow(math.Sin(w*h/2), 2), 1e-15)
		near(t, "sin", c.v[1].Float64(), math.Sin(w*h), 1e-15)

		// Three integrators: h, h²/2, exactly nothing on the diagonal and below.
		n := expm1(squareOf([]float64{0, 1, 0}, []float64{0, 0, 1}, []float64{0, 0, 0}), dd.New(h))
		same("h", n.v[1], h)
		same("h²/2", n.v[2], h*h/2)
		for _, i := range []int{0, 3, 4, 6, 7, 8} {
			if n.v[i].Hi != 0 {
				t.Errorf("entry %d of a nilpotent block is %g", i, n.v[i].Hi)
			}
		}
	}
}

// Steps of any length agree with the prepared step, inputs moving as a polynomial and as a sine.
func TestAdvanceBy(t *testing.T) {
	a := []float64{-2, 1e4, 0, -3000}
	b := []float64{0, 0, 0, 0, 5, 0, 0, 3e6}
	s := make([]float64, 16)
	s[1] = 1                   // columns 0 and 1: a value and its slope
	s[2*4+3], s[3*4+2] = 7, -7 // columns 2 and 3: a sine pair
	f := newFlow(2, 4, a, b, s)
	for _, h := range []float64{1e-9, 3e-4, 0.037, 1.9} {
		z := []float64{0.3, -1, 2, 0.5, 0.1, 0.9}
		once := append([]float64(nil), z...)
		p, err := f.step(dd.New(h))
		if err != nil {
			t.Fatal(err)
		}
		p.apply(once, make([]float64, 2), f.scratch())
		if err := f.advanceBy(z, make([]float64, 2), h); err != nil {
			t.Fatal(err)
		}
		// A dozen steps, each rounded; sizes up to the sum of what flows in.
		for i := range 2 {
			near(t, "state", z[i], once[i], 1e-13*(math.Abs(once[i])+1))
		}
		near(t, "ramp", z[2], 2+0.5*h, 1e-15*4)
		sin, cos := math.Sincos(7 * h)
		near(t, "sine", z[4], 0.1*cos+0.9*sin, 1e-14)
		near(t, "cosine", z[5], 0.9*cos-0.1*sin, 1e-14)
	}
	if _, err := newFlow(1, 0, []float64{800}, nil, nil).step(dd.New(1)); err == nil {
		t.Error("e^800 has no error")
	}
}
