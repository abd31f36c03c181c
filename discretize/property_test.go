package discretize

import (
	"math"
	"math/big"
	"math/cmplx"
	"testing"

	"pgregory.net/rapid"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// stablePlant draws a stable plant of order 1 to 5: real poles and pairs between about
// 0.1 and 10 rad/s, up to two integrators, zeros in the left half plane, strictly proper
// when asked.
func stablePlant(strict bool) *rapid.Generator[sdomain.Model] {
	return rapid.Custom(func(t *rapid.T) sdomain.Model {
		den, num := exact.IntPoly(1), exact.IntPoly(rapid.Int64Range(1, 9).Draw(t, "gain"))
		for range rapid.IntRange(1, 3).Draw(t, "factors") {
			a := rapid.Int64Range(1, 30).Draw(t, "a")
			f := exact.NewPoly(big.NewRat(a, 5), big.NewRat(1, 1))
			if rapid.Bool().Draw(t, "pair") { // ζ from 0.05
				f = exact.NewPoly(big.NewRat(a*a, 25), big.NewRat(a*rapid.Int64Range(1, 12).Draw(t, "damping"), 50), big.NewRat(1, 1))
			}
			den = den.Mul(f)
		}
		den = den.Shift(rapid.IntRange(0, 2).Draw(t, "integrators"))
		most := den.Degree()
		if strict {
			most--
		}
		for range rapid.IntRange(0, min(3, most)).Draw(t, "zeros") {
			num = num.Mul(exact.NewPoly(big.NewRat(rapid.Int64Range(1, 60).Draw(t, "z"), 7), big.NewRat(1, 1)))
		}
		r, err := exact.FromPolys(num, den)
		if err != nil {
			t.Fatal(err)
		}
		return sdomain.Model{Ratio: r, Delay: new(big.Rat)}
	})
}

func period() *rapid.Generator[*big.Rat] {
	return rapid.Custom(func(t *rapid.T) *big.Rat {
		e := rapid.IntRange(0, 7).Draw(t, "decade")
		return big.NewRat(rapid.Int64Range(10, 99).Draw(t, "digits"), int64(math.Pow(10, float64(e+1))))
	})
}

// TestSplitDelay: a delay split between the plant's dead time and the loop changes
// nothing, bit for bit.
func TestSplitDelay(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, T := stablePlant(false).Draw(t, "plant"), period().Draw(t, "T")
		ticks := big.NewRat(rapid.Int64Range(0, 5000).Draw(t, "delay"), 300)
		share := big.NewRat(rapid.Int64Range(0, 7).Draw(t, "share"), 7)
		tau := new(big.Rat).Mul(ticks, T)
		part := new(big.Rat).Mul(tau, share)
		whole, err := Hold(m, T, tau)
		if err != nil {
			t.Fatal(err)
		}
		m.Delay = part
		split, err := Hold(m, T, new(big.Rat).Sub(tau, part))
		if err != nil {
			t.Fatal(err)
		}
		if !sameTF(whole, split) {
			t.Fatalf("%+v\n%+v", whole.TF, split.TF)
		}
	})
}

func sameTF(a, b zdomain.Model) bool {
	if len(a.TF.Num) != len(b.TF.Num) || len(a.TF.Poles) != len(b.TF.Poles) || a.TF.Ticks != b.TF.Ticks ||
		a.TF.OriginZeros != b.TF.OriginZeros || a.TF.OriginPoles != b.TF.OriginPoles {
		return false
	}
	for i := range a.TF.Num {
		if a.TF.Num[i] != b.TF.Num[i] {
			return false
		}
	}
	for i := range a.TF.Poles {
		if a.TF.Poles[i] != b.TF.Poles[i] {
			return false
		}
	}
	return true
}

// TestKeepsStructure: every method keeps integrators as an integer, complex poles
// as exact pairs, and the leading coefficient of the series about the origin, which is
// the DC gain of a plant without integrators; the hold at any delay too.
func TestKeepsStructure(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, T := stablePlant(false).Draw(t, "plant"), period().Draw(t, "T")
		start, c := m.Ratio.Laurent(1)
		// tol: a dozen operations in double-double, then two roundings to float64
		check := func(name string, h zdomain.Model, scale, tol float64) {
			if h.TF.OriginZeros-h.TF.OriginPoles != start {
				t.Fatalf("%s: order at the origin %d, want %d", name, h.TF.OriginZeros-h.TF.OriginPoles, start)
			}
			g := h.TF.Num[0].Div(negProduct(h.TF.Poles)).Float64()
			want, _ := c[0].Float64()
			want *= scale
			if !(math.Abs(g-want) <= tol*math.Abs(want)) {
				t.Fatalf("%s: leading coefficient %.17g, want %.17g", name, g, want)
			}
			pairs(t, name, h.TF.Poles)
		}
		delay := new(big.Rat).Mul(T, big.NewRat(rapid.Int64Range(-9, 30).Draw(t, "delay"), 10))
		h, err := Hold(m, T, delay)
		if err != nil {
			t.Fatal(err)
		}
		check("Hold", h, 1, 0x1p-52)
		at := big.NewRat(rapid.Int64Range(1, 31).Draw(t, "at"), 10)
		for _, method := range Methods() {
			spec, scale, tol := Spec{Method: method}, 1.0, 0x1p-52
			if method == "prewarped" {
				// s = k·δ + … gives the leading coefficient k^start. The test's own tan loses a factor
				// x/sin(x) < 80 at x = 3.1, squared for two integrators in first order: 200 roundings
				spec.At = new(big.Rat).Quo(at, T)
				x, _ := at.Float64()
				scale, tol = math.Pow(x/2/math.Tan(x/2), float64(start)), 200*0x1p-53
			}
			h, err := Map(m, spec, T)
			if err != nil {
				t.Fatal(err)
			}
			check(method, h, scale, tol)
		}
	})
}

func pairs(t *rapid.T, name string, poles []dd.Complex) {
	count := map[dd.Complex]int{}
	for _, p := range poles {
		if p.IsZero() {
			t.Fatalf("%s: a pole at the origin among the others", name)
		}
		if p.Im.Sign() != 0 {
			count[p]++
			count[p.Conj()]--
		}
	}
	for p, n := range count {
		if n != 0 {
			t.Fatalf("%s: %v has no exact conjugate", name, p)
		}
	}
}

// atDelta evaluates m, without its whole ticks, at δ.
func atDelta(m zdomain.Model, d dd.Complex) dd.Complex {
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
	return v
}

// taylor returns G(s) and the next three coefficients of its Taylor series about s.
func taylor(m sdomain.Model, s dd.Complex) (g [4]dd.Complex) {
	n, d := m.Ratio.NumPoly().DD(), m.Ratio.DenPoly().DD()
	var a, b [4]dd.Complex
	for k := range a {
		f := dd.One.Div(dd.New([]float64{1, 1, 2, 6}[k]))
		a[k], b[k] = n.Eval(s).Scale(f), d.Eval(s).Scale(f)
		n, d = n.Derivative(), d.Derivative()
	}
	for k := range g {
		g[k] = a[k]
		for j := range k {
			g[k] = g[k].Sub(g[j].Mul(b[k-j]))
		}
		g[k] = g[k].Div(b[0])
	}
	return g
}

// TestOrderInPeriod: as T → 0 the response at a fixed frequency approaches the
// continuous one, with the leading error of each method (Taylor series of the map, or
// of the hold's own response, in sT; closed forms):
//
//	hold      −T·(s/2)·G      forward   T·(s²/2)·G'     tustin   −T²·(s³/12)·G'
//	triangle  T²·(s²/12)·G    backward  −T·(s²/2)·G'
//
// With |s| = 1 the next order is at most T times the sum of the Taylor coefficients, to a
// factor of 10 that leaves room for the aliases of a plant of relative degree one.
func TestOrderInPeriod(t *testing.T) {
	T := big.NewRat(1, 10000)
	s := dd.C(0, 1)
	d := deltaOf(s, dd.FromRat(T))
	rapid.Check(t, func(t *rapid.T) {
		m := stablePlant(true).Draw(t, "plant")
		c := taylor(m, s)
		g, g1, size := c[0].Complex128(), c[1].Complex128(), 0.0
		for _, v := range c {
			size += v.Abs()
		}
		for method, want := range map[string]struct {
			order int
			lead  complex128
		}{
			"hold": {1, -1i / 2 * g}, "forward": {1, -g1 / 2}, "backward": {1, g1 / 2},
			"tustin": {2, 1i * g1 / 12}, "triangle": {2, -g / 12},
		} {
			h, err := Map(m, Spec{Method: method}, T)
			if err != nil {
				t.Fatal(err)
			}
			diff := atDelta(h, d).Sub(c[0]).Complex128() * complex(math.Pow(1e4, float64(want.order)), 0)
			if !(cmplx.Abs(diff-want.lead) <= 10*1e-4*size) {
				t.Fatalf("%s: error/T^%d = %v, want %v within %.1e", method, want.order, diff, want.lead, 1e-3*size)
			}
		}
	})
}

// TestCoefficientsInPeriod: the coefficients of the hold equivalent in δ approach
// those of the plant in s, to first order: halving T halves each difference, to the
// next order, |p|·T·(order) ≈ 6·1e-6·6 < 1e-4.
func TestCoefficientsInPeriod(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := stablePlant(true).Draw(t, "plant")
		tf, err := m.TF()
		if err != nil {
			t.Fatal(err)
		}
		difference := func(T *big.Rat) []float64 {
			h, err := Hold(m, T, new(big.Rat))
			if err != nil {
				t.Fatal(err)
			}
			var out []float64
			for i, v := range h.TF.Num {
				if i < len(tf.Num) {
					v = v.Sub(tf.Num[i])
				}
				out = append(out, v.Float64())
			}
			return out
		}
		a, b := difference(big.NewRat(1, 1000000)), difference(big.NewRat(1, 2000000))
		for i := range a {
			// coefficients the plant does not have start at T^1 or higher: at least halved
			if !(math.Abs(b[i]) <= 0.5*math.Abs(a[i])*(1+1e-2)+1e-25) {
				t.Fatalf("coefficient %d: %g at T, %g at T/2", i, a[i], b[i])
			}
		}
	})
}

// TestMatchedPoles: each pole of the matched map is e^{pT} of one of the plant's,
// to float64; checked against math/cmplx.
func TestMatchedPoles(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := stablePlant(false).Draw(t, "plant")
		T := big.NewRat(rapid.Int64Range(1, 90).Draw(t, "T"), 100)
		h, err := Map(m, Spec{Method: "matched"}, T)
		if err != nil {
			t.Fatal(err)
		}
		poles, err := m.Ratio.Poles()
		if err != nil {
			t.Fatal(err)
		}
		x, _ := T.Float64()
		z := zPoints(h.TF.Poles, h.TF.Period)
		if len(z) != len(poles) {
			t.Fatalf("%d poles, want %d", len(z), len(poles))
		}
		for _, p := range poles {
			want, best := cmplx.Exp(p.Complex128()*complex(x, 0)), math.Inf(1)
			for _, v := range z {
				best = math.Min(best, cmplx.Abs(v-want))
			}
			// |p|·T up to 5.4 is rounded at 2^-53, then the exponential: < 16 units
			if !(best <= 16*0x1p-53) {
				t.Fatalf("no pole at %v: %v", want, z)
			}
		}
	})
}

// TestExtremes: whatever the magnitudes, a method answers with finite numbers or an
// error; it neither panics nor leaves a NaN.
func TestExtremes(t *testing.T) {
	number := func(t *rapid.T, name string, span int) *big.Rat {
		e := rapid.IntRange(-span, span).Draw(t, name)
		r := new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(max(e, -e))), nil))
		if e < 0 {
			r.Inv(r)
		}
		return r.Mul(r, big.NewRat(rapid.Int64Range(-3, 9).Draw(t, name+" digit"), 1))
	}
	rapid.Check(t, func(t *rapid.T) {
		span := rapid.SampledFrom([]int{2, 12, 120, 400}).Draw(t, "span")
		var num, den exact.Poly
		for range rapid.IntRange(1, 4).Draw(t, "num") {
			num = append(num, number(t, "b", span))
		}
		for range rapid.IntRange(1, 5).Draw(t, "den") {
			den = append(den, number(t, "a", span))
		}
		r, err := exact.FromPolys(exact.NewPoly(num...), exact.NewPoly(den...))
		if err != nil {
			return
		}
		m := sdomain.Model{Ratio: r, Delay: new(big.Rat)}
		T := period().Draw(t, "T")
		for _, method := range Methods() {
			h, err := Map(m, Spec{Method: method, At: big.NewRat(1, 10)}, T)
			checkFinite(t, method, h, err)
		}
		h, err := Hold(m, T, new(big.Rat).Mul(T, big.NewRat(7, 3)))
		checkFinite(t, "Hold", h, err)
		if _, err := Pathological(m, T); err != nil {
			t.Log(err)
		}
	})
}

func checkFinite(t *rapid.T, name string, h zdomain.Model, err error) {
	if err != nil {
		if err.Error() == "" {
			t.Fatalf("%s: empty message", name)
		}
		return
	}
	for i, v := range h.TF.Num {
		if !v.IsFinite() || i == 0 && v.Sign() == 0 {
			t.Fatalf("%s: numerator %v", name, h.TF.Num)
		}
	}
	for _, v := range h.TF.Poles {
		if !v.IsFinite() || v.IsZero() {
			t.Fatalf("%s: poles %v", name, h.TF.Poles)
		}
	}
}
