package poly

import (
	"encoding/json"
	"errors"
	"math"
	"math/big"
	"math/cmplx"
	"os"
	"testing"

	"steadytick/internal/dd"
)

// decimal reads a decimal to double-double.
func decimal(t *testing.T, s string) dd.Float {
	t.Helper()
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		t.Fatalf("not a number: %q", s)
	}
	return dd.FromRat(r)
}

func floats(c ...float64) Poly {
	p := make(Poly, len(c))
	for i, v := range c {
		p[i] = dd.New(v)
	}
	return p
}

// bound is the relative error that Roots promises for a root near x:
// 7(n+1)·Eps·κ, κ = Σ|p_k||x|^k/(|x||p'(x)|), and Eps for the rounding of x.
func bound(p Poly, x dd.Complex) float64 {
	h := newHorner(p, 0)
	v := h.double(x)
	y := x.Ldexp(-v.e).Abs()
	sum := 0.0
	for k, c := range h.view(v.e).f {
		sum += math.Abs(c) * math.Pow(y, float64(k))
	}
	return dd.Eps * (1 + 7*float64(len(p))*sum/(y*cmplx.Abs(v.dp)))
}

// checkSymmetry holds the set of roots to the promises on conjugates and order.
func checkSymmetry(t interface{ Fatalf(string, ...any) }, x []dd.Complex) {
	for i := 0; i < len(x); i++ {
		if i > 0 && x[i].Abs() < x[i-1].Abs() {
			t.Fatalf("root %d is smaller than the one before: %v", i, x)
		}
		if x[i].Im.Hi == 0 {
			if x[i].Im.Lo != 0 {
				t.Fatalf("root %d is not exactly real: %v", i, x[i])
			}
			continue
		}
		if i+1 == len(x) || x[i+1] != x[i].Conj() || x[i].Im.Sign() < 0 {
			t.Fatalf("root %d = %v has no conjugate after it", i, x[i])
		}
		i++
	}
}

// nearest takes the root nearest to z out of x and returns its relative distance.
func nearest(x *[]dd.Complex, z dd.Complex) float64 {
	best, at := math.Inf(1), 0
	for i, v := range *x {
		if d := v.Sub(z).Abs(); d < best {
			best, at = d, i
		}
	}
	(*x)[at] = (*x)[len(*x)-1]
	*x = (*x)[:len(*x)-1]
	return best / z.Abs()
}

// Source: mpmath's polyroots, 50 digits, testdata/roots.py.
func TestRootsAgainstReference(t *testing.T) {
	raw, err := os.ReadFile("testdata/roots.json")
	if err != nil {
		t.Fatal(err)
	}
	var ref struct {
		Cases []struct {
			Name string
			P    []float64
			X    [][2]string
		}
	}
	if err := json.Unmarshal(raw, &ref); err != nil {
		t.Fatal(err)
	}
	if len(ref.Cases) < 20 {
		t.Fatalf("only %d cases", len(ref.Cases))
	}
	for _, c := range ref.Cases {
		p := floats(c.P...)
		x, err := p.Roots()
		if err != nil || len(x) != len(c.X) {
			t.Errorf("%s: %d roots, %v", c.Name, len(x), err)
			continue
		}
		checkSymmetry(t, x)
		worst := 0.0
		for _, w := range c.X {
			z := dd.Complex{Re: decimal(t, w[0]), Im: decimal(t, w[1])}
			d, tol := nearest(&x, z), bound(p, z)
			if !(d <= tol) {
				t.Errorf("%s: root %v off by %.3g relative, tolerance %.3g", c.Name, z.Complex128(), d, tol)
			}
			worst = math.Max(worst, d)
		}
		t.Logf("%-45s worst relative error %.2g", c.Name, worst)
	}
}

// Limiting zeros of the hold equivalent of 1/s^n: Åström, Hagander, Sternby, "Zeros of
// sampled systems", Automatica 20, 1984; Euler polynomials (coefficients: Eulerian
// numbers). Printed to the digits below; tolerance half a unit of the last one.
func TestEulerPolynomials(t *testing.T) {
	for _, c := range []struct {
		p    Poly
		want []float64
		tol  []float64
	}{
		{floats(1, 1), []float64{-1}, []float64{0}},
		{floats(1, 4, 1), []float64{-0.2679491924, -3.732050808}, []float64{5e-11, 5e-10}},
		{floats(1, 11, 11, 1), []float64{-0.1010205144, -1, -9.898979486}, []float64{5e-11, 1e-30, 5e-10}},
		{floats(1, 26, 66, 26, 1), []float64{-0.0430962882, -0.4305753471, -2.322473887, -23.20385448},
			[]float64{5e-11, 5e-11, 5e-10, 5e-9}},
	} {
		x, err := c.p.Roots()
		if err != nil || len(x) != len(c.want) {
			t.Fatalf("%v: %v, %v", c.p, x, err)
		}
		checkSymmetry(t, x)
		for i, w := range c.want {
			if d := math.Abs(x[i].Re.Sub(dd.New(w)).Float64()); !(d <= c.tol[i]) || x[i].Im != (dd.Float{}) {
				t.Errorf("degree %d: root %v, want %v ± %.1g", len(c.want), x[i], w, c.tol[i])
			}
		}
	}
}

// Wilkinson's polynomial Π (x − k), k = 1..20. Its integer coefficients, below
// 2^65, are exact in double-double; κ reaches 1e15, so 16 digits find nothing.
func TestWilkinson(t *testing.T) {
	coef := []*big.Int{big.NewInt(1)}
	var want []dd.Complex
	for k := int64(1); k <= 20; k++ {
		next := make([]*big.Int, len(coef)+1)
		for i := range next {
			next[i] = new(big.Int)
			if i > 0 {
				next[i].Add(next[i], coef[i-1])
			}
			if i < len(coef) {
				next[i].Sub(next[i], new(big.Int).Mul(big.NewInt(k), coef[i]))
			}
		}
		coef = next
		want = append(want, dd.C(float64(k), 0))
	}
	var p Poly
	for _, c := range coef {
		p = append(p, dd.FromRat(new(big.Rat).SetInt(c)))
	}
	if q := FromRoots(want); !equal(p, q) {
		t.Errorf("FromRoots is not exact on whole numbers: %v", q)
	}
	x, err := p.Roots()
	if err != nil || len(x) != 20 {
		t.Fatal(x, err)
	}
	for i, w := range want {
		d, tol := x[i].Sub(w).Abs()/w.Abs(), bound(p, w)
		if !(d <= tol) || x[i].Im != (dd.Float{}) {
			t.Errorf("root %d = %v off by %.3g, tolerance %.3g", i+1, x[i], d, tol)
		}
	}
}

func equal(p, q Poly) bool {
	if len(p) != len(q) {
		return false
	}
	for i := range p {
		if p[i] != q[i] {
			return false
		}
	}
	return true
}

// Multiple roots with exact coefficients: the cluster radius is (bound)^(1/m),
// more exactly |x − r|^m <= 2·3.5(n+1)·Eps·Σ|p_k||r|^k / |p^(m)(r)/m!|, and the
// pairing moves a root by no more than the radius again. The last factor is
// Π (r − r_j) over the other roots.
func TestClusters(t *testing.T) {
	for _, c := range []struct {
		name string
		p    Poly
		r    []dd.Complex
		tol  []float64
	}{
		// (x+1)³(x+2): Σ|p_k| = 24, Π = 1: (7·5·24·Eps)^(1/3) = 3.5e-10
		{"triple", floats(2, 7, 9, 5, 1), []dd.Complex{dd.C(-1, 0), dd.C(-1, 0), dd.C(-1, 0), dd.C(-2, 0)}, []float64{7e-10, 7e-10, 7e-10, 1e-27}},
		// (x+1)²(x+3)(x+2): Σ = 48, Π = 2: (7·5·24·Eps)^(1/2) = 6.4e-15
		{"double", floats(6, 17, 17, 7, 1), []dd.Complex{dd.C(-1, 0), dd.C(-1, 0), dd.C(-2, 0), dd.C(-3, 0)}, []float64{1.3e-14, 1.3e-14, 1e-28, 1e-28}},
		// (x²+2x+2)²: Σ|p_k|√2^k = 4+8√2+16+8√2+4 = 46.6, |Π| = 4: (7·5·12·Eps)^(1/2) = 4.5e-15
		{"double pair", floats(4, 8, 8, 4, 1), []dd.Complex{dd.C(-1, 1), dd.C(-1, 1), dd.C(-1, -1), dd.C(-1, -1)}, []float64{9e-15, 9e-15, 9e-15, 9e-15}},
		// (x−1)⁸: Σ = 256: (7·9·256·Eps)^(1/8) = 4.2e-4
		{"eightfold", floats(1, -8, 28, -56, 70, -56, 28, -8, 1), repeat(dd.C(1, 0), 8), []float64{9e-4, 9e-4, 9e-4, 9e-4, 9e-4, 9e-4, 9e-4, 9e-4}},
		// (x+3)²: exact by the closed form
		{"square", floats(9, 6, 1), repeat(dd.C(-3, 0), 2), []float64{0, 0}},
	} {
		x, err := c.p.Roots()
		if err != nil || len(x) != len(c.r) {
			t.Errorf("%s: %v, %v", c.name, x, err)
			continue
		}
		checkSymmetry(t, x)
		rest := append([]dd.Complex(nil), x...)
		for i, r := range c.r {
			if d := nearest(&rest, r); !(d <= c.tol[i]) {
				t.Errorf("%s: root %v off by %.3g, tolerance %.3g: %v", c.name, r.Complex128(), d, c.tol[i], x)
			}
		}
	}
}

func repeat(z dd.Complex, n int) []dd.Complex {
	out := make([]dd.Complex, n)
	for i := range out {
		out[i] = z
	}
	return out
}

func TestRootsOfDegenerate(t *testing.T) {
	inf := math.Inf(1)
	var zero Poly
	if _, err := zero.Roots(); !errors.Is(err, ErrZeroPolynomial) {
		t.Errorf("zero polynomial: %v", err)
	}
	if _, err := floats(0, 0).Roots(); !errors.Is(err, ErrZeroPolynomial) {
		t.Errorf("zero coefficients: %v", err)
	}
	if x, err := floats(5, 0, 0).Roots(); err != nil || len(x) != 0 {
		t.Errorf("constant: %v, %v", x, err)
	}
	x, err := floats(0, 0, 0, 6, 2, 0).Roots()
	if err != nil || len(x) != 4 || !x[0].IsZero() || !x[1].IsZero() || !x[2].IsZero() || x[3] != dd.C(-3, 0) {
		t.Errorf("x³(2x+6) with a zero leading coefficient: %v, %v", x, err)
	}
	if x, err := floats(0, 0, 7).Roots(); err != nil || len(x) != 2 || !x[0].IsZero() || !x[1].IsZero() {
		t.Errorf("7x²: %v, %v", x, err)
	}
	// x² ± 1e20·x + 1: the small root is 1e-20·(1 + 1e-40); 3 roundings.
	for _, sign := range []float64{1, -1} {
		x, err := floats(1, sign*1e20, 1).Roots()
		w := dd.New(-sign).Div(dd.New(1e20))
		if err != nil || len(x) != 2 || !(x[0].Re.Sub(w).Abs().Float64() <= 3*dd.Eps*1e-20) {
			t.Errorf("x² + %vx + 1: %v, %v", sign*1e20, x, err)
		}
	}
	var out *RangeError
	for _, p := range []Poly{
		floats(1, inf, 1), floats(1, 2, math.NaN()), floats(math.NaN(), 1),
		floats(1e300, 1e-300), floats(1e-300, 1e300), // roots of 1e±600
		floats(1e-300, 1, 1, 1e-300),        // 1e-300, 1, 1e300: too far apart
		floats(1e-300, 1e300, 1e300, 1e300), // 1e-600
		floats(1e-200, 1e200, 0, 0, 1e-300), // 1e-400
	} {
		if x, err := p.Roots(); !errors.As(err, &out) {
			t.Errorf("%v: %v, %v: want a RangeError", p, x, err)
		}
	}
}

// Roots near the ends of the range: (x² + x + 1)(x + 1) with x scaled, so that the
// small roots are cube roots of one. The low words underflow below 2^-1074.
func TestRootsAtTheEndsOfTheRange(t *testing.T) {
	for _, c := range []struct {
		p     Poly
		scale float64
	}{
		{floats(1e-300, 1, 1e300, 1e300), 1e-300},
		{floats(1e300, 1e300, 1, 1e-300), 1e300},
	} {
		x, err := c.p.Roots()
		if err != nil || len(x) != 3 {
			t.Errorf("%v: %v, %v", c.p, x, err)
			continue
		}
		checkSymmetry(t, x)
		// The third factor, near −1, and the product of 1e-300 and 1e300, rounded
		// decimals, move the roots by 1e-16.
		z := dd.C(-0.5*c.scale, math.Sqrt(0.75)*c.scale)
		if d := nearest(&x, z); !(d <= 4e-16) {
			t.Errorf("%v: %v off by %.3g", c.p, z, d)
		}
	}
}

// x^n − 1 has its roots on the unit circle, at whole fractions of a turn.
func TestRootsOfUnity(t *testing.T) {
	for _, n := range []int{3, 4, 7, 64, 120} {
		p := make(Poly, n+1)
		p[0], p[n] = dd.New(-1), dd.One
		x, err := p.Roots()
		if err != nil || len(x) != n {
			t.Fatal(n, err)
		}
		for k := range n {
			s, c := dd.SinCos(dd.Pi.MulFloat(2 * float64(k)).Div(dd.New(float64(n))))
			z := dd.Complex{Re: c, Im: s}
			// |z| errs by 2^-98 (dd.SinCos), κ = 2/n.
			if d, tol := nearest(&x, z), bound(p, z)+0x1p-98; !(d <= tol) {
				t.Errorf("n = %d, k = %d: off by %.3g, tolerance %.3g", n, k, d, tol)
			}
		}
	}
}

// A convergence that is not reached is an error that says so.
func TestConvergenceError(t *testing.T) {
	_, err := Aberth(func(x dd.Complex) (p, dp dd.Complex) {
		return dd.CExp(x), dd.CExp(x) // no root anywhere: each step goes one to the left
	}, []dd.Complex{dd.C(0.5, 0.5)})
	var c *ConvergenceError
	if !errors.As(err, &c) || c.Left != 1 || !(c.Residual > 1e-4) || c.Sweeps != generalSweeps {
		t.Errorf("e^x: %v", err)
	}
}

func BenchmarkRoots(b *testing.B) {
	for _, n := range []int{5, 10, 20, 40} {
		var r []dd.Complex
		for k := range n {
			r = append(r, dd.C(-math.Pow(10, 11*float64(k)/float64(n)-3), 0))
		}
		p := FromRoots(r)
		b.Run(map[int]string{5: "degree5", 10: "degree10", 20: "degree20", 40: "degree40"}[n], func(b *testing.B) {
			for b.Loop() {
				if _, err := p.Roots(); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
