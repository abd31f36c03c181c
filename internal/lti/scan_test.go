package lti

import (
	"math"
	"math/cmplx"
	"testing"

	"steadytick/internal/dd"
)

// TestScan compares with the double-double evaluation, itself held against the check
// values in algebra_test.go and margins_test.go.
func TestScan(t *testing.T) {
	for _, r := range references(t) {
		l := r.tf(t)
		s, err := l.Scan()
		if err != nil {
			t.Errorf("%s: %v", r.Name, err)
			continue
		}
		top := 1e4
		if T := l.Period.Float64(); T > 0 {
			top = math.Pi / T
		}
		for i := range 60 {
			w := top * math.Pow(10, -float64(i)/8)
			got, want := s.At(w), l.Freq(w)
			// 20 factors of a few roundings each; frequencies stay 1e-3 away from the modes
			// (their damping), where a rounding of ω costs 1e3 of them; of the delay's angle
			// two roundings
			tol := 5e-13 + 2*0x1p-52*w*(l.DeadTime.Float64()+l.Period.Float64()*float64(l.Ticks))
			if !(cmplx.Abs(got-want) <= tol*cmplx.Abs(want)) {
				t.Errorf("%s at %g rad/s: %v, want %v", r.Name, w, got, want)
			}
		}
	}
}

func TestScanEnds(t *testing.T) {
	s, err := servo(1).Scan()
	if err != nil || !cmplx.IsInf(s.At(0)) {
		t.Errorf("integrator at rest: %v, %v", s.At(0), err)
	}
	z, err := Constant(dd.Zero, dd.Zero).Scan()
	if err != nil || z.At(3) != 0 {
		t.Errorf("zero function: %v, %v", z.At(3), err)
	}
	g := heldServo(1, dd.One, 0)
	s, err = g.Scan()
	// G(−1) = (−0.3679 + 0.2642)/(2·1.3679) of the published coefficients
	want := (-0.367879441171442 + 0.264241117657115) / (2 + 2*0.367879441171442)
	if got := s.At(math.Pi); err != nil || !(cmplx.Abs(got-complex(want, 0)) <= 1e-14) {
		t.Errorf("at half the sampling rate: %v, want %v, %v", got, want, err)
	}
	if _, err := (TF{Num: ascending(1, 1, 1), Poles: reals(-1)}).Scan(); err != ErrImproper {
		t.Errorf("improper: %v", err)
	}
}

// TestBandwidth: closed forms. T = 1/(1 + s/a): a. T = k/(s² + s + k):
// ω² = (k − 1/2) + √((k − 1/2)² + k²). A first-order sampled lag, z-pole p: |1−p|²/|e^(jωT)−p|² = 1/2.
func TestBandwidth(t *testing.T) {
	bandwidth := func(s System) float64 {
		t.Helper()
		p, err := ClosedPoles(s.Loop(), 64)
		if err != nil {
			t.Fatal(err)
		}
		w, ok, err := s.Bandwidth(p)
		if err != nil || !ok {
			t.Fatalf("%v, %v", ok, err)
		}
		return w
	}
	one := Constant(dd.One, dd.Zero)
	wantNear(t, "first order", bandwidth(unity(one, TF{Num: ascending(7), OriginPoles: 1})), 7, 1e-14)
	for _, k := range []float64{0.3, 10, 1e6} {
		want := math.Sqrt(k - 0.5 + math.Hypot(k-0.5, k))
		wantNear(t, "second order", bandwidth(unity(one, servo(k))), want, 1e-13)
	}
	T := num(t, "0.001")
	g := TF{Num: ascending(50), OriginPoles: 1, Period: T} // z-pole 0.95
	want := math.Acos((1+0.95*0.95-2*0.05*0.05)/(2*0.95)) / 0.001
	wantNear(t, "sampled", bandwidth(unity(Constant(dd.One, T), g)), want, 1e-13) // acos loses ωT ~ 0.05
	wide := TF{Num: ascending(1800), OriginPoles: 1, Period: T}                   // z-pole −0.8: |T| rises
	if w := bandwidth(unity(Constant(dd.One, T), wide)); !math.IsInf(w, 1) {
		t.Errorf("no fall below half the sampling rate: %g", w)
	}
}

// TestBandwidthNotch: a notch of relative width 1e-5 far below the roll-off sets the
// bandwidth: |(s²+ω²)/(s²+2ζωs+ω²)|² = 1/2 at ω_n²(1 + 2ζ² − 2ζ√(1+ζ²)), ζ = 1e-5 (a short
// calculation: |ω_n² − ω²| = 2ζωω_n).
func TestBandwidthNotch(t *testing.T) {
	const zeta = 1e-5
	notch := func(w float64) complex128 {
		s := complex(0, w)
		d := complex((1-w)*(1+w), 0)
		return d / (d + 2*zeta*s) / (1 + s/1000)
	}
	got := Bandwidth(notch, 1, []complex128{complex(-zeta, 1), complex(0, 1), -1000}, math.Inf(1))
	want := math.Sqrt(1+zeta*zeta) - zeta
	wantNear(t, "notch", got, want, 1e-11) // the roll-off moves it by ζ·1e-6
}

func TestBandwidthNone(t *testing.T) {
	s := unity(Constant(dd.Zero, dd.Zero), servo(1))
	if _, ok, err := s.Bandwidth(Poles{}); ok || err != nil {
		t.Errorf("T = 0: %v, %v", ok, err)
	}
	flat := func(float64) complex128 { return 1 }
	if w := Bandwidth(flat, 1, nil, math.Inf(1)); !math.IsInf(w, 1) {
		t.Errorf("flat: %g", w)
	}
}

// A dead time of 1 s on a lag of 1e-4 s: |T| rises and falls with each turn of the delay, and the first dip
// below 3 dB is at a turn that the envelope 0.67g/(1 + 0.67g) = dc/√2, g = |1/(1 + jω·1e-4)|, names to within
// one turn: dc = 0.67/1.67.
func TestBandwidthOfADelayComb(t *testing.T) {
	gy := TF{Num: ascending(1e4), Poles: reals(-1e4), DeadTime: dd.One}
	c := Constant(num(t, "0.67"), dd.Zero)
	s := System{Cr: c, Cm: c, Gy: gy, Gm: gy, OneDegree: true, StaticSensor: &dd.One}
	p, err := ClosedPoles(s.Loop(), 64)
	if err != nil {
		t.Fatal(err)
	}
	w, ok, err := s.Bandwidth(p)
	if !ok || err != nil {
		t.Fatal(ok, err)
	}
	level := 0.67 / 1.67 / math.Sqrt2
	g := level / (0.67 * (1 - level))
	envelope := 1e4 * math.Sqrt(1/(g*g)-1)
	// the first dip after the envelope has passed: less than a turn later, and a dip's width of slack
	if !(w >= envelope-0.1 && w <= envelope+2*2*math.Pi) {
		t.Errorf("bandwidth %.10g, envelope at %.10g", w, envelope)
	}
}
