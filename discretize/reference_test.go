package discretize

import (
	"encoding/json"
	"math"
	"math/big"
	"os"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/poly"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// fromFactors builds a model from its factors, ascending decimals.
func fromFactors(t testing.TB, num, den [][]string) sdomain.Model {
	t.Helper()
	r := exact.Const(big.NewRat(1, 1))
	one := exact.IntPoly(1)
	for side, factors := range [][][]string{num, den} {
		for _, f := range factors {
			var p exact.Poly
			for _, c := range f {
				p = append(p, dec(t, c))
			}
			q, err := exact.FromPolys(p, one)
			if err != nil {
				t.Fatal(err)
			}
			if side == 0 {
				r = r.Mul(q)
			} else if r, err = r.Div(q); err != nil {
				t.Fatal(err)
			}
		}
	}
	return sdomain.Model{Ratio: r, Delay: new(big.Rat)}
}

// worst returns the largest relative difference of got from the decimals in want; a
// coefficient that is zero in one of the two only counts as 1.
func worst(t testing.TB, got poly.Poly, want []string) float64 {
	w := 0.0
	for i := range max(len(got), len(want)) {
		g, x := new(big.Rat), new(big.Rat)
		if i < len(got) {
			if !got[i].IsFinite() {
				return math.Inf(1)
			}
			g = got[i].Rat()
		}
		if i < len(want) {
			x = dec(t, want[i])
		}
		if x.Sign() == 0 {
			if g.Sign() != 0 {
				w = math.Max(w, 1)
			}
			continue
		}
		d := new(big.Rat).Sub(g, x)
		rel, _ := d.Quo(d, x).Float64()
		w = math.Max(w, math.Abs(rel))
	}
	return w
}

type deltaReference struct {
	Ticks    int
	Pole     bool
	Num, Den []string
}

// difference compares m with ref, returning the worst relative differences of
// numerator and denominator coefficients.
func (ref deltaReference) difference(t testing.TB, m zdomain.Model) (num, den float64) {
	poles := m.TF.Poles
	if ref.Pole {
		last := poles[len(poles)-1]
		if want := dd.One.Div(dd.FromRat(m.Period)).Neg(); last != dd.Real(want) {
			t.Errorf("last pole %v, want exactly −1/T", last)
		}
		poles = poles[:len(poles)-1]
	}
	if m.TF.Ticks != ref.Ticks {
		t.Errorf("%d ticks, want %d", m.TF.Ticks, ref.Ticks)
	}
	n := m.TF.Num.Shift(m.TF.OriginZeros)
	d := poly.FromRoots(poles).Shift(m.TF.OriginPoles)
	return worst(t, n, ref.Num), worst(t, d, ref.Den)
}

// referenceTolerance: a numerator coefficient of order 12 takes n²/2 products and sums of
// 2^-104 relative error, 3.5e-30; the poles bring |p|·T·2^-104 of phase (5000 for the
// mode of 1e4 rad/s at 0.5 s, 2.5e-28); slow zeros cancel 1e3. Together below 1e-27.
const referenceTolerance = 1e-27

// TestReference holds hold and triangle equivalents against 300-digit matrix
// exponentials (testdata/hold_reference.py, mpmath). Orders 1 to 12, T from 1e-7 to 0.5 s.
func TestReference(t *testing.T) {
	var plants []struct {
		Name     string
		Num, Den [][]string
		Cases    []struct {
			Period, Delay  string
			Hold, Triangle *deltaReference
		}
	}
	data, err := os.ReadFile("testdata/hold_reference.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &plants); err != nil {
		t.Fatal(err)
	}
	checked := 0
	for _, p := range plants {
		m := fromFactors(t, p.Num, p.Den)
		for _, c := range p.Cases {
			T := dec(t, c.Period)
			h, err := Hold(m, T, dec(t, c.Delay))
			if err != nil {
				t.Errorf("%s, T = %s: %v", p.Name, c.Period, err)
				continue
			}
			tol := referenceTolerance
			if p.Name == "differentiating twice" {
				// of the two zeros one stays at δ = 0, the other lies at about T/12·…: its coefficient is of
				// order T² where the terms that make it are of order 1, six operations of 2^-104 each
				x, _ := T.Float64()
				tol = math.Max(tol, 6*12*dd.Eps/(x*x))
			}
			n, d := c.Hold.difference(t, h)
			if !(n <= tol && d <= referenceTolerance) {
				t.Errorf("%s, T = %s, delay %s: hold equivalent off by %.1e and %.1e, want %.1e", p.Name, c.Period, c.Delay, n, d, tol)
			}
			checked++
			if c.Triangle == nil {
				continue
			}
			h, err = Map(m, Spec{Method: "triangle"}, T)
			if err != nil {
				t.Errorf("%s, T = %s: %v", p.Name, c.Period, err)
				continue
			}
			n, d = c.Triangle.difference(t, h)
			if !(n <= referenceTolerance && d <= referenceTolerance) {
				t.Errorf("%s, T = %s: triangle equivalent off by %.1e and %.1e", p.Name, c.Period, n, d)
			}
		}
	}
	if checked < 100 {
		t.Errorf("only %d cases in the reference file", checked)
	}
}
