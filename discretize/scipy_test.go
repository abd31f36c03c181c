package discretize

import (
	"encoding/json"
	"math/big"
	"math/cmplx"
	"os"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// at evaluates m at z, directly from the definition of lti.TF.
func at(m zdomain.Model, z complex128) complex128 {
	d := dd.FromComplex(z)
	d.Re = d.Re.Sub(dd.One)
	d = dd.Complex{Re: d.Re.Div(m.TF.Period), Im: d.Im.Div(m.TF.Period)}
	v := m.TF.Num.Eval(d)
	for _, p := range m.TF.Poles {
		v = v.Div(d.Sub(p))
	}
	for range m.TF.OriginZeros {
		v = v.Mul(d)
	}
	for range m.TF.OriginPoles {
		v = v.Div(d)
	}
	out := v.Complex128()
	for range m.TF.Ticks {
		out /= z
	}
	return out
}

// TestSciPy compares five methods with scipy.signal.cont2discrete 1.10.1
// (testdata/scipy_reference.py, which derives the tolerance of each value).
func TestSciPy(t *testing.T) {
	var cases []struct {
		Name, Method string
		Num, Den     []float64
		Period       float64
		Points       []struct {
			Z, H      [2]float64
			Tolerance float64
		}
	}
	data, err := os.ReadFile("testdata/scipy_reference.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &cases); err != nil {
		t.Fatal(err)
	}
	if len(cases) != 150 {
		t.Fatalf("%d cases, want 150", len(cases))
	}
	rats := func(x []float64) (p exact.Poly) {
		for _, v := range x {
			p = append(p, new(big.Rat).SetFloat64(v))
		}
		return exact.NewPoly(p...)
	}
	for _, c := range cases {
		r, err := exact.FromPolys(rats(c.Num), rats(c.Den))
		if err != nil {
			t.Fatal(err)
		}
		m, err := Map(sdomain.Model{Ratio: r, Delay: new(big.Rat)}, Spec{Method: c.Method}, new(big.Rat).SetFloat64(c.Period))
		if err != nil {
			t.Errorf("%s %s: %v", c.Name, c.Method, err)
			continue
		}
		for _, p := range c.Points {
			got, want := at(m, complex(p.Z[0], p.Z[1])), complex(p.H[0], p.H[1])
			if d := cmplx.Abs(got - want); !(d <= p.Tolerance) {
				t.Errorf("%s, %s, T = %v, z = %v: %v, SciPy %v, off %.1e, allowed %.1e", c.Name, c.Method, c.Period, p.Z, got, want, d, p.Tolerance)
			}
		}
	}
}
