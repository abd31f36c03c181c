package discretize

import (
	"math"
	"math/big"
	"math/cmplx"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

func mustHold(t testing.TB, m sdomain.Model, T, delay string) zdomain.Model {
	t.Helper()
	out, err := Hold(m, dec(t, T), dec(t, delay))
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func mustMap(t testing.TB, m sdomain.Model, method string, T *big.Rat) zdomain.Model {
	t.Helper()
	out, err := Map(m, Spec{Method: method}, T)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// zPoints returns 1 + δT.
func zPoints(d []dd.Complex, T dd.Float) []complex128 {
	out := make([]complex128, len(d))
	for i, v := range d {
		v = v.Scale(T)
		v.Re = v.Re.Add(dd.One)
		out[i] = v.Complex128()
	}
	return out
}

// TestLimitingZeros: zeros of the hold equivalent of 1/sⁿ, at any T (Åström,
// Hagander, Sternby, "Zeros of sampled systems", Automatica 20, 1984; the Euler
// polynomials; roots recomputed). Tolerance: half a unit of the last digit given.
func TestLimitingZeros(t *testing.T) {
	for n, want := range map[int][]float64{
		2: {-1}, 3: {-3.732050808, -0.2679491924},
		4: {-9.898979486, -1, -0.1010205144},
		5: {-23.20385448, -2.322473887, -0.4305753471, -0.0430962882},
	} {
		for _, T := range []string{"1", "1e-7"} {
			den := make([]int64, n+1)
			den[n] = 1
			h := mustHold(t, model(t, []int64{1}, den), T, "0")
			roots, err := h.TF.Num.Roots()
			if err != nil {
				t.Fatal(err)
			}
			if len(roots) != len(want) || h.TF.OriginPoles != n || len(h.TF.Poles) != 0 {
				t.Fatalf("1/s^%d: %d zeros, %d origin poles", n, len(roots), h.TF.OriginPoles)
			}
			z := zPoints(roots, h.TF.Period)
			for _, w := range want {
				best := math.Inf(1)
				for _, v := range z {
					best = math.Min(best, cmplx.Abs(v-complex(w, 0)))
				}
				if !(best <= 6e-10*math.Max(1, math.Abs(w))) {
					t.Errorf("1/s^%d, T = %s: no zero within %.1e of %v: %v", n, T, best, w, z)
				}
			}
		}
	}
}

// series returns n coefficients of num/den in powers of 1/z, given ascending
// powers of z, with den monic.
func series(num, den []float64, n int) []float64 {
	a := make([]float64, len(den)) // numerator in descending powers, padded
	copy(a[len(den)-len(num):], reversed(num))
	d := reversed(den)
	out := make([]float64, n)
	for k := range out {
		if k < len(a) {
			out[k] = a[k]
		}
		for j := 1; j <= k && j < len(d); j++ {
			out[k] -= d[j] * out[k-j]
		}
	}
	return out
}

func reversed(a []float64) []float64 {
	out := make([]float64, len(a))
	for i, v := range a {
		out[len(a)-1-i] = v
	}
	return out
}

func convolve(a, b []float64) []float64 {
	out := make([]float64, len(a))
	for i := range out {
		for j := 0; j <= i; j++ {
			out[i] += a[j] * b[i-j]
		}
	}
	return out
}

// TestDeadbeat: plant 1/(s(s+1)), T = 1. A reference step answered with y = 1 from
// the first tick on shows in u and between the ticks what the hold equivalent says. (Known
// textbook example; all figures recomputed with 50-digit arithmetic.)
func TestDeadbeat(t *testing.T) {
	m := model(t, []int64{1}, []int64{0, 1, 1})
	impulse := func(delay string, n int) []float64 {
		num, den := zCoefficients(mustHold(t, m, "1", delay))
		return series(num, den, n)
	}
	g, half := impulse("0", 8), impulse("-0.5", 8)
	// u = (1/(z−1)) / H: divide 1/z + 1/z² + … by g, whose first term is g[1]/z
	u := make([]float64, 7)
	for k := range u {
		u[k] = 1
		for j := 0; j < k; j++ {
			u[k] -= u[j] * g[k+1-j]
		}
		u[k] /= g[1]
	}
	near(t, "u", u[:3], []float64{2.71828183, -2.95249244, 2.12072167}, 5e-9)
	y := convolve(u, half) // y(k + 1/2)
	near(t, "y between ticks", y[1:3], []float64{1.36156025, 0.740297843}, 5e-9)

	u = []float64{1.58197671, -0.581976707, 0, 0, 0, 0, 0}
	near(t, "ripple-free y", convolve(u, g)[1:5], []float64{0.581976707, 1, 1, 1}, 5e-9)
	near(t, "ripple-free y between", convolve(u, half)[2:5], []float64{1, 1, 1}, 5e-9)
}

// TestDeadbeatStateFeedback: the double integrator with position gain 1/T² and
// velocity gain 3/(2T) has all closed-loop poles at z = 0: the characteristic polynomial
// in δ is (δ + 1/T)², exactly. (Closed form.)
func TestDeadbeatStateFeedback(t *testing.T) {
	for _, T := range []string{"1", "0.0009765625"} { // dyadic: no rounding at all
		x := mustHold(t, model(t, []int64{1}, []int64{0, 0, 1}), T, "0")
		v := mustHold(t, model(t, []int64{1}, []int64{0, 1}), T, "0")
		r := dd.One.Div(x.TF.Period)
		p := x.TF.Num.Scale(r.Mul(r)).
			Add(v.TF.Num.Shift(1).Scale(r.MulFloat(1.5))).
			Add(poly.Poly{dd.Zero, dd.Zero, dd.One})
		want := poly.Poly{r.Mul(r), r.Ldexp(1), dd.One}
		for i := range want {
			if p[i] != want[i] {
				t.Errorf("T = %s: coefficient %d is %v, want %v", T, i, p[i], want[i])
			}
		}
	}
}

// TestHoldLag: an integrator behind a hold lags by T/2 more than without, 9° at a
// twentieth of the sample rate, and with a tick of delay by 1.5 T, 27°. Its gain grows by
// (ωT/2)/sin(ωT/2), the inverse of the hold's own gain, 0.983631643 at a tenth, because
// all aliases fall together. (Closed form; the figures are common practice, recomputed.)
func TestHoldLag(t *testing.T) {
	m := model(t, []int64{1}, []int64{0, 1})
	for delay, want := range map[string]float64{"0": 9, "1": 27, "0.25": 9 + 4.5} {
		h := mustHold(t, m, "1", delay)
		w := 2 * math.Pi / 20
		lag := -90 - cmplx.Phase(at(h, cmplx.Exp(complex(0, w))))*180/math.Pi
		tol := 1e-12 // 90° in float64 is good to 1.4e-14; cos and sin of w to 1e-16 relative
		if delay == "0.25" {
			tol = 0.3 // between ticks the lag is only nearly linear in ω: aliases of size (ωT)²/12 rad
		}
		if !(math.Abs(lag-want) <= tol) {
			t.Errorf("delay %s: lag %.12f°, want %v°", delay, lag, want)
		}
	}
	w := 2 * math.Pi / 10
	gain := 1 / (w * cmplx.Abs(at(mustHold(t, m, "1", "0"), cmplx.Exp(complex(0, w)))))
	if !(math.Abs(gain-0.983631643) <= 5e-10) {
		t.Errorf("hold gain %.12f", gain)
	}
}

// hertz returns the rational closest to 2π·f in double-double.
func hertz(f float64) *big.Rat { return dd.Pi.MulFloat(2 * f).Rat() }

// TestNotchLanding: where tustin puts notches, fs = 1 kHz (f′ = atan(π·f·T)/(π·T), 30 digits;
// recomputed), and that prewarped leaves them where they were.
func TestNotchLanding(t *testing.T) {
	T := big.NewRat(1, 1000)
	for _, c := range []struct {
		method   string
		at, want float64
	}{
		{"tustin", 300, 240.576707262}, {"tustin", 100, 96.892191614},
		{"prewarped", 300, 300}, {"prewarped", 100, 100}, {"prewarped", 499.9, 499.9},
		{"matched", 300, 300},
	} {
		s := sdomain.S()
		w, err := sdomain.Const(hertz(c.at)).Mul(sdomain.Const(hertz(c.at)))
		if err != nil {
			t.Fatal(err)
		}
		s2, _ := s.Mul(s)
		num, _ := s2.Add(w)
		damp, _ := s.Mul(sdomain.Const(hertz(40)))
		den, _ := num.Add(damp)
		notch, err := num.Div(den)
		if err != nil {
			t.Fatal(err)
		}
		m, err := Map(notch, Spec{Method: c.method, At: hertz(c.at)}, T)
		if err != nil {
			t.Fatal(err)
		}
		zeros, err := m.TF.Num.Roots()
		if err != nil || len(zeros) != 2 {
			t.Fatal(err, zeros)
		}
		f := math.Abs(cmplx.Phase(zPoints(zeros, m.TF.Period)[0])) * 1000 / (2 * math.Pi)
		if !(math.Abs(f-c.want) <= 5e-10) { // half a unit of the last digit given
			t.Errorf("%s of a %g Hz notch: %.12f Hz, want %.9f", c.method, c.at, f, c.want)
		}
	}
}

// TestDerivativeFilter: s/(Tf·s + 1) with Tf/T = 0.25; poles z (recomputed, closed form).
func TestDerivativeFilter(t *testing.T) {
	T := big.NewRat(1, 100)
	m := model(t, []int64{0, 400}, []int64{400, 1})
	for method, want := range map[string]float64{"tustin": -1.0 / 3, "backward": 0.2, "forward": -3} {
		h := mustMap(t, m, method, T)
		z := zPoints(h.TF.Poles, h.TF.Period)
		if len(z) != 1 || h.TF.OriginZeros != 1 || !(cmplx.Abs(z[0]-complex(want, 0)) <= 0x1p-52) {
			t.Errorf("%s: poles %v, want %v; %d zeros at DC", method, z, want, h.TF.OriginZeros)
		}
		moved := MovedOutside(m, h)
		if method != "forward" {
			if len(moved) != 0 {
				t.Errorf("%s: %v reported as moved outside", method, moved)
			}
			continue
		}
		if len(moved) != 1 || moved[0].S != -400 || !(cmplx.Abs(moved[0].Z+3) <= 0x1p-50) {
			t.Errorf("forward: moved %v, want −400 → −3", moved)
		}
	}
}

// minus3dB finds where |H| falls to 1/√2, in Hz.
func minus3dB(m zdomain.Model) float64 {
	T := m.TF.Period.Float64()
	lo, hi := 0.0, math.Pi
	for range 60 {
		mid := (lo + hi) / 2
		if cmplx.Abs(at(m, cmplx.Exp(complex(0, mid)))) > math.Sqrt(0.5) {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo / (2 * math.Pi * T)
}

// TestLowPass: y += α(x − y), corner fc = fs/10 (recomputed). α = T/(τ+T) is the
// backward difference, α = 1 − e^(−T/τ) the hold equivalent and, in gain, the matched one.
func TestLowPass(t *testing.T) {
	w := hertz(1)
	lag, err := sdomain.Const(w).Div(mustAdd(t, sdomain.S(), sdomain.Const(w)))
	if err != nil {
		t.Fatal(err)
	}
	for method, want := range map[string]float64{"backward": 0.79180543, "hold": 1.0346541, "matched": 1.0346541} {
		f := minus3dB(mustMap(t, lag, method, big.NewRat(1, 10)))
		if !(math.Abs(f-want) <= 5e-8) {
			t.Errorf("%s: −3 dB at %.9f fc, want %.8f", method, f, want)
		}
	}
}

func mustAdd(t testing.TB, a, b sdomain.Model) sdomain.Model {
	t.Helper()
	out, err := a.Add(b)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// TestMatchedZeros: of three zeros at infinity one stays there and two go to z = −1;
// a finite zero goes to e^{sT} (closed form).
func TestMatchedZeros(t *testing.T) {
	den := []int64{24, 50, 35, 10, 1} // (s+1)(s+2)(s+3)(s+4)
	for _, c := range []struct {
		num  []int64
		want []float64
	}{
		{[]int64{1}, []float64{-1, -1, -1}},
		{[]int64{5, 1}, []float64{-1, -1, math.Exp(-1.25)}},
		{[]int64{5, 6, 1}, []float64{-1, math.Exp(-1.25), math.Exp(-0.25)}},
	} {
		h := mustMap(t, model(t, c.num, den), "matched", big.NewRat(1, 4))
		want := make([]dd.Complex, len(c.want))
		for i, z := range c.want {
			want[i] = dd.C((z-1)*4, 0)
		}
		p := poly.FromRoots(want)
		if len(h.TF.Num) != len(p) {
			t.Errorf("%v: %d zeros, want %d", c.num, len(h.TF.Num)-1, len(want))
			continue
		}
		lead := h.TF.Num[len(p)-1]
		for i := range p {
			// e^x rounded at 2^-53 and 1 − e^x > 0.2: a factor of 5 for each of three zeros
			if got := h.TF.Num[i].Div(lead).Float64(); !(math.Abs(got-p[i].Float64()) <= 16*0x1p-53*math.Abs(got)) {
				t.Errorf("%v: coefficient %d is %.17g, want %.17g", c.num, i, got, p[i].Float64())
			}
		}
	}
	if got := MatchedGain(model(t, []int64{1, 1}, []int64{0, 1, 1})); got != -1 {
		t.Errorf("one integrator: gain matched at order %d, want −1", got)
	}
}
