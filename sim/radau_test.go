package sim

import (
	"math"
	"testing"
)

// The points are Radau's: c = 1 is one of them and the rule Σ b_i f(c_i), b the last row of a, is
// exact up to degree 2s − 2; each row of a integrates powers up to s − 1 exactly.
func TestRadauTable(t *testing.T) {
	r := radauTable()
	for d := 0; d <= 2*stages-2; d++ {
		sum := 0.0
		for k := range stages {
			sum += r.a[stages-1][k] * math.Pow(r.node[k+1], float64(d))
		}
		near(t, "last row", sum, 1/float64(d+1), 1e-14)
	}
	for i := range stages {
		for d := range stages {
			sum := 0.0
			for k := range stages {
				sum += r.a[i][k] * math.Pow(r.node[k+1], float64(d))
			}
			near(t, "row", sum, math.Pow(r.node[i+1], float64(d+1))/float64(d+1), 1e-14)
		}
	}
	for d := 0; d < 4*stages; d++ {
		sum := 0.0
		for i, x := range r.gaussX {
			sum += r.gaussW[i] * math.Pow(x, float64(d))
		}
		near(t, "Gauss", sum, 1/float64(d+1), 1e-14)
	}
	var v values
	for i, c := range r.node {
		v[i] = math.Exp(c)
	}
	d := v.slope(r)
	for i, c := range r.node {
		near(t, "slope", d[i], math.Exp(c), 1e-11) // error of interpolation e·0.5^11·…/11!
	}
	for _, c := range []float64{0, 0.1, 0.77, 1} {
		near(t, "value", v.at(r, c), math.Exp(c), 1e-12)
	}
}

// The stability function at λh → −∞ is 0: x1 = 1 − b·λh·(I − λh·a)⁻¹·1 vanishes like 1/|λh|.
func TestRadauDamps(t *testing.T) {
	r := radauTable()
	const z = -1e12
	a := make([]float64, stages*stages)
	b := make([]float64, stages)
	for i := range stages {
		for k := range stages {
			a[i*stages+k] = -z * r.a[i][k]
		}
		a[i*stages+i]++
		b[i] = 1
	}
	f, ok := factor(a, stages)
	if !ok {
		t.Fatal("singular")
	}
	f.solve(b)
	near(t, "end of a stiff piece", b[stages-1], 0, 1e-10)
}

// Small unknowns keep their digits beside large ones: rows of size 1 and 1e-20.
func TestSolveKeepsSmallRows(t *testing.T) {
	// x = (1, 1e-20) of [1 0.5e20; 1e-20 3]·x = (1.5, 4e-20).
	f, ok := factor([]float64{1, 0.5e20, 1e-20, 3}, 2)
	if !ok {
		t.Fatal("singular")
	}
	b := []float64{1.5, 4e-20}
	f.solve(b)
	near(t, "large", b[0], 1, 1e-15)
	near(t, "small", b[1]*1e20, 1, 1e-15)
	if _, ok := factor([]float64{1, 2, 2, 4}, 2); ok {
		t.Error("a singular matrix is not found")
	}
}
