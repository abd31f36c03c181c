package poly

import (
	"encoding/json"
	"math"
	"math/cmplx"
	"os"
	"testing"

	"steadytick/internal/dd"

	"pgregory.net/rapid"
)

// drawRoots draws a conjugate-closed list of roots with moduli between 10^low and
// 10^high, sometimes multiple or close to each other.
func drawRoots(t *rapid.T, most int, low, high float64) []dd.Complex {
	var r []dd.Complex
	n := rapid.IntRange(1, most).Draw(t, "roots")
	for len(r) < n {
		m := math.Pow(10, rapid.Float64Range(low, high).Draw(t, "log modulus"))
		switch kind := rapid.IntRange(0, 9).Draw(t, "kind"); {
		case kind < 4 || len(r)+1 == n:
			r = append(r, dd.C(-m, 0))
		case kind < 5:
			r = append(r, dd.C(m, 0))
		case kind < 6 && len(r) > 0:
			last := r[len(r)-1]
			if last.Im.Sign() == 0 {
				r = append(r, dd.C(last.Re.Hi*(1+rapid.Float64Range(0, 1e-4).Draw(t, "gap")), 0))
			}
		default:
			a := math.Pi * rapid.Float64Range(0.4, 1).Draw(t, "angle")
			z := dd.C(m*math.Cos(a), m*math.Sin(a))
			r = append(r, z, z.Conj())
		}
	}
	return r
}

// A pair of roots beside ten real ones between −1.0091 and −1: the noise of the ten is
// wide enough for an eleventh point, and the pair was lost to it once.
func TestCrowdedCluster(t *testing.T) {
	z := dd.C(-0.9632239692028498, 0.26974413386636614)
	r := []dd.Complex{z, z.Conj()}
	for _, v := range []float64{
		1.00028111678778, 1.0045073642544624, 11.599870077289447, 10000, 1.0090350448414473, 4.27424463261162,
		1.0001405485169472, 1.0002108301829544, 1.0000000002680562, 0.02996142741004364, 1.0000702717894114,
		1.0001702788165903, 0.020535250264571463, 1.0000087837036347, 1.0000175674844227,
	} {
		r = append(r, dd.C(-v, 0))
	}
	for _, w := range []dd.Complex{dd.C(-0.7355760827049593, 0.6907094528603241), dd.C(-0.788836493281219, 0.61561404157122), dd.C(0.11098839136808016, 0.9938570565080963)} {
		r = append(r, w, w.Conj())
	}
	x, err := FromRoots(r).Roots()
	if err != nil || len(x) != len(r) {
		t.Fatal(x, err)
	}
	checkSymmetry(t, x)
	// The bound of TestRootsOfFromRoots for this root.
	if d := nearest(&x, z); !(d <= 1.7e-17) {
		t.Errorf("the pair is off by %.3g: %v", d, x)
	}
}

// radii are the Newton radii n(|p(x)| + bound)/|p'(x)|: within each lies a root.
func radii(p Poly, x []dd.Complex) []float64 {
	h := newHorner(p, 0)
	out := make([]float64, len(x))
	for i, z := range x {
		v := h.double(z)
		out[i] = float64(p.Degree()) * (cmplx.Abs(v.p) + v.bound) / cmplx.Abs(v.dp) * math.Ldexp(1, v.e)
	}
	return out
}

// Roots∘FromRoots returns the roots: all of them, each within the first-order bound
//
//	7(n+1)·Eps·κ + 4n·Eps·Π(|r|+|r_i|)/(|r||p'(r)|)
//
// of the root finding and of the coefficients (see FromRoots), where that bound
// is less than 1/1000 of the distance to the nearest other root, so that first order serves.
func TestRootsOfFromRoots(t *testing.T) {
	var held, all int
	rapid.Check(t, func(t *rapid.T) {
		r := drawRoots(t, 24, -3, 8)
		p := FromRoots(r)
		x, err := p.Roots()
		if err != nil || len(x) != len(r) {
			t.Fatalf("%d roots, want %d: %v", len(x), len(r), err)
		}
		checkSymmetry(t, x)
		n := float64(len(r))
		for i, z := range r {
			gap, product, slope := math.Inf(1), 2.0, 1.0 // (|r| + |r_i|)/|r| of the root itself
			for j, w := range r {
				if j != i {
					d := z.Sub(w).Abs()
					gap = math.Min(gap, d/z.Abs())
					product *= (z.Abs() + w.Abs()) / z.Abs()
					slope *= d / z.Abs()
				}
			}
			// Σ|p_k||r|^k <= Π(|r| + |r_i|), so the product serves for κ too.
			tol := dd.Eps * (1 + (7*(n+1)+4*n)*product/slope)
			all++
			if !(tol < gap/1000) {
				continue
			}
			held++
			best := math.Inf(1)
			for _, v := range x {
				best = math.Min(best, v.Sub(z).Abs()/z.Abs())
			}
			if !(best <= tol) {
				t.Fatalf("root %v of %v off by %.3g, tolerance %.3g", z.Complex128(), r, best, tol)
			}
		}
	})
	if t.Logf("%d of %d roots were apart enough to be held", held, all); !t.Failed() && held < all/2 {
		t.Errorf("only %d of %d roots were held to the bound", held, all)
	}
}

// Any coefficients: as many roots as the degree, each zero within its error bound,
// and together they give the polynomial back. A root x_i that is off by ρ_i changes a
// coefficient by less than Σ ρ_i/|x_i| of that of Π(x + |x_i|), to first order;
// in a cluster the match is only known within the sum of the radii, hence n·Σ.
func TestRootsOfAnyCoefficients(t *testing.T) {
	var held, all int
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 30).Draw(t, "degree")
		spread := rapid.SampledFrom([]float64{0.1, 1, 10, 30}).Draw(t, "spread")
		p := make(Poly, n+1)
		for k := range p {
			c := math.Pow(10, rapid.Float64Range(-spread, spread).Draw(t, "log coefficient"))
			switch rapid.IntRange(0, 3).Draw(t, "sign") {
			case 0:
				c = -c
			case 1:
				if k > 0 && k < n {
					c = 0
				}
			}
			p[k] = dd.New(c)
		}
		x, err := p.Roots()
		if err != nil || len(x) != n {
			t.Fatalf("%v: %d roots, %v", p, len(x), err)
		}
		checkSymmetry(t, x)
		sum := 4 * dd.Eps
		size := make([]dd.Complex, n)
		for i, rho := range radii(p, x) {
			sum += rho / x[i].Abs()
			size[i] = dd.C(-x[i].Abs(), 0)
		}
		tol := 2 * float64(n) * sum
		all++
		if !(tol < 1e-3) {
			return
		}
		held++
		q, s := FromRoots(x), FromRoots(size)
		for k := range q {
			if d := q[k].Mul(p[n]).Sub(p[k]).Abs().Float64(); !(d <= tol*s[k].Mul(p[n]).Abs().Float64()) {
				t.Fatalf("%v: coefficient %d off by %.3g of %v, tolerance %.3g, roots %v", p, k, d, p[k].Hi, tol, x)
			}
		}
	})
	if t.Logf("%d of %d polynomials held", held, all); !t.Failed() && held < all*9/10 {
		t.Errorf("only %d of %d polynomials were held to the bound", held, all)
	}
}

// Scaling: p(cx) for a power of two c has the roots divided by c, bit for bit.
func TestRootsScale(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := FromRoots(drawRoots(t, 12, -2, 2))
		e := rapid.IntRange(-60, 60).Draw(t, "exponent")
		q := make(Poly, len(p))
		for k, c := range p {
			q[k] = c.Ldexp(e * k)
		}
		x, err := p.Roots()
		y, err2 := q.Roots()
		if err != nil || err2 != nil {
			t.Fatal(err, err2)
		}
		for i := range x {
			if x[i].Ldexp(-e) != y[i] {
				t.Fatalf("root %d: %v and %v", i, x[i], y[i])
			}
		}
	})
}

// Negative whole roots below 2^5, 20 at most: every coefficient is a whole number
// below 2^105 (Π (1 + r_i) <= 2^100), so FromRoots must be exact.
func TestFromRootsAccuracy(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var r []dd.Complex
		exact := []dd.Float{dd.One}
		n := rapid.IntRange(0, 20).Draw(t, "n")
		for range n {
			m := float64(rapid.IntRange(1, 31).Draw(t, "root"))
			r = append(r, dd.C(-m, 0))
			next := make([]dd.Float, len(exact)+1)
			for k, c := range exact {
				next[k+1] = next[k+1].Add(c)
				next[k] = next[k].Add(c.MulFloat(m))
			}
			exact = next
		}
		if got := FromRoots(r); !equal(got, exact) {
			t.Fatalf("FromRoots(%v) = %v, want %v", r, got, exact)
		}
	})
}

func TestFromRootsWithoutConjugatePanics(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("no panic")
		}
	}()
	FromRoots([]dd.Complex{dd.C(-1, 1), dd.C(-1, -1), dd.C(-2, 3)})
}

// Starts gives as many points as roots, zeros for zero roots, on the circles of
// the Newton polygon: for widely spread roots within a factor of 2 of their moduli.
func TestStarts(t *testing.T) {
	r := []dd.Complex{{}, {}, dd.C(-1e-3, 0), dd.C(-5, 0), dd.C(-1e4, 0), dd.C(-1e8, 1e8), dd.C(-1e8, -1e8)}
	x := Starts(FromRoots(r))
	if len(x) != len(r) {
		t.Fatal(x)
	}
	for i := range r {
		if a, b := x[i].Abs(), r[i].Abs(); !(a <= 2*b && 2*a >= b) {
			t.Errorf("start %d has modulus %v, its root %v", i, a, b)
		}
	}
	if len(Starts(nil)) != 0 || len(Starts(floats(3))) != 0 || len(Starts(floats(0, 0, 1))) != 2 {
		t.Error("degenerate polynomials")
	}
}

// x + e^(−x) = 0 is solved by W_k(−1), Lambert's function (mpmath, 50 digits, testdata/roots.py).
func TestAberthLambert(t *testing.T) {
	raw, err := os.ReadFile("testdata/roots.json")
	if err != nil {
		t.Fatal(err)
	}
	var ref struct{ Lambert [][2]string }
	if err := json.Unmarshal(raw, &ref); err != nil || len(ref.Lambert) < 6 {
		t.Fatal(ref, err)
	}
	var want, start []dd.Complex
	for _, w := range ref.Lambert {
		z := dd.Complex{Re: decimal(t, w[0]), Im: decimal(t, w[1])}
		want = append(want, z)
		start = append(start, dd.C(z.Re.Hi+0.2, z.Im.Hi-0.15))
	}
	before := append([]dd.Complex(nil), start...)
	x, err := Aberth(func(x dd.Complex) (p, dp dd.Complex) {
		e := dd.CExp(x.Neg())
		return x.Add(e), dd.Real(dd.One).Sub(e)
	}, start)
	if err != nil {
		t.Fatal(err)
	}
	for i, z := range want {
		// f errs by 2^-97·|x| (CExp and the sum), f' = 1 + x is above |x|/2 here.
		if d := x[i].Sub(z).Abs(); !(d <= 0x1p-95*z.Abs()) {
			t.Errorf("W_%d(−1): %v off by %.3g", i, x[i], d)
		}
		if start[i] != before[i] {
			t.Error("the starting points were changed")
		}
	}
}
