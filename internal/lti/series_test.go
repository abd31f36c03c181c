package lti

import (
	"errors"
	"math"
	"testing"

	"steadytick/internal/dd"
)

// seriesTol is the design's target for constants and series.
const seriesTol = 1e-11

func wantSeries(t *testing.T, what string, got []dd.Float, want ...float64) {
	t.Helper()
	for k, w := range want {
		if w == 0 && got[k].Sign() != 0 {
			t.Errorf("%s: c%d = %g, want exactly 0", what, k, got[k].Float64())
		}
		wantNear(t, what, got[k].Float64(), w, seriesTol)
	}
}

// TestSeries: geometric and exponential series by hand.
func TestSeries(t *testing.T) {
	l := servo(6).Series(4) // 6/s·(1 − s + s² − s³)
	if l.Start != -1 {
		t.Fatalf("start %d", l.Start)
	}
	wantSeries(t, "6/(s(s+1))", l.C, 6, -6, 6, -6)
	d := TF{Num: ascending(1), DeadTime: dd.Two}
	wantSeries(t, "e^(−2s)", d.Series(4).C, 1, -2, 2, -4.0/3)
	z := TF{Num: ascending(1), Ticks: 3, Period: dd.New(0.5)}
	// (1+δT)^−3 = 1 − 3δT + 6(δT)² − 10(δT)³
	wantSeries(t, "z^−3", z.Series(4).C, 1, -1.5, 1.5, -1.25)
	c := TF{Num: ascending(5, 1), Poles: []dd.Complex{dd.C(-1, 2), dd.C(-1, -2)}}
	// (5 + s)/(s² + 2s + 5): q0 = 1, q1 = (1−2)/5, q2 = (−2q1 − q0)/5
	wantSeries(t, "complex pair", c.Series(3).C, 1, -0.2, -0.12)
}

func TestLaurent(t *testing.T) {
	a := NewLaurent(-1, ascending(1, 2, 3, 4))
	b := NewLaurent(1, ascending(0, 2, 1))
	q, err := a.Div(b)
	if err != nil || q.Start != -3 || len(q.C) != 2 {
		t.Fatalf("quotient %+v, %v", q, err)
	}
	wantSeries(t, "quotient", q.C, 0.5, 0.75)
	if _, err := a.Div(NewLaurent(0, ascending(0, 0))); !errors.Is(err, ErrZeroSeries) {
		t.Errorf("division by zero series: %v", err)
	}
	third := dd.One.Div(dd.New(3))
	noisy := NewLaurent(0, []dd.Float{third.Add(dd.New(1e-31))})
	if c := noisy.Sub(NewLaurent(0, []dd.Float{third})).C[0]; c.Sign() != 0 {
		t.Errorf("noise of one part in 3e30 is kept: %g", c.Float64())
	}
	kept := NewLaurent(0, []dd.Float{third.Add(dd.New(1e-24))})
	wantNear(t, "a real difference", kept.Sub(NewLaurent(0, []dd.Float{third})).C[0].Float64(), 1e-24, 1e-7)
}

// unity is a loop with controller k and a static sensor.
func unity(c, g TF) System {
	one := dd.One
	return System{Cr: c, Cm: c, Gy: g, Gm: g, OneDegree: true, StaticSensor: &one}
}

// TestTrackingServo: 10/(s(s+1)): 1−T = (s²+s)/(s²+s+10). Kv = 10, ramp error 0.1
// at every T (final value theorem).
func TestTrackingServo(t *testing.T) {
	s := unity(Constant(dd.New(10), dd.Zero), servo(1))
	want := []float64{0, 0.1, 0.09, -0.019} // c2 = (1−c1)/10, c3 = −(c1+c2)/10
	wantSeries(t, "series", s.TrackingSeries(4), want...)
	wantSeries(t, "loop", s.LoopErrorSeries(4), want...)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(4), want...)
	for _, T := range []string{"1e-7", "1e-4", "0.01", "0.2"} {
		h := num(t, T)
		z := unity(Constant(dd.New(10), h), heldServo(1, h, 0))
		wantSeries(t, "ramp error at T = "+T, z.TrackingSeries(2), 0, 0.1)
		wantSeries(t, "ramp error by coefficients at T = "+T, z.TrackingByCoefficients(2), 0, 0.1)
	}
}

// TestTrackingType2: 10(s+1)/s², T = 0.1 s: hold equivalent (1.05 z − 0.95)/(z−1)² =
// (10.5 δ + 10)/δ², Ka = 10, parabola error 0.1 for r = t²/2 (closed form).
func TestTrackingType2(t *testing.T) {
	T := num(t, "0.1")
	g := TF{Num: ascending(10, 10.5), OriginPoles: 2, Period: T}
	s := unity(Constant(dd.One, T), g)
	wantSeries(t, "series", s.TrackingSeries(3), 0, 0, 0.1)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(3), 0, 0, 0.1)
}

// TestSensorLag: a sensor 1/(τs+1) in the feedback path makes the ramp tracking
// error 1/Kv − τ, the loop error 1/Kv (closed form).
func TestSensorLag(t *testing.T) {
	const tau = 0.03125 // exact in binary
	g := servo(10)
	gm := g.Mul(TF{Num: ascending(1 / tau), Poles: reals(-1 / tau)})
	c := Constant(dd.One, dd.Zero)
	s := System{Cr: c, Cm: c, Gy: g, Gm: gm, OneDegree: true}
	wantSeries(t, "tracking", s.TrackingSeries(2), 0, 0.1-tau)
	wantSeries(t, "loop", s.LoopErrorSeries(2), 0, 0.1)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(2), 0, 0.1-tau)
	s.Cr, s.OneDegree = c.Scale(dd.New(1.5)), false
	wantSeries(t, "set-point weight 1.5", s.TrackingSeries(1), -0.5)
}

// TestStaticSensorGain: sensor gain h: T(0) = 1/h for an integrating loop.
func TestStaticSensorGain(t *testing.T) {
	h := dd.New(1.25)
	g := servo(10)
	c := Constant(dd.One, dd.Zero)
	s := System{Cr: c, Cm: c, Gy: g, Gm: g.Scale(h), OneDegree: true, StaticSensor: &h}
	// 1−T = 1 − 10/(s²+s+12.5): c0 = 1−0.8, c1 = 10/12.5²
	want := []float64{0.2, 0.064}
	wantSeries(t, "series", s.TrackingSeries(2), want...)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(2), want...)
	s.StaticSensor = nil
	wantSeries(t, "general route", s.TrackingSeries(2), want...)
	exact := dd.One
	s.StaticTracking = &exact
	wantSeries(t, "given static gain", s.TrackingSeries(1), 0)
}

// TestSeriesDelay: k/s with dead time τ: 1/(1+L) = s/(s + k e^(−sτ)):
// c1 = 1/k, c2 = (1/k)(τ − 1/k).
func TestSeriesDelay(t *testing.T) {
	g := TF{Num: ascending(4), OriginPoles: 1, DeadTime: dd.New(0.125)}
	s := unity(Constant(dd.One, dd.Zero), g)
	want := []float64{0, 0.25, 0.25 * (0.125 - 0.25)}
	wantSeries(t, "series", s.TrackingSeries(3), want...)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(3), want...)
	wantSeries(t, "response", ResponseSeries(s, 3), 1, -want[1], -want[2])
}

// TestSeriesPoleAtRest: L(0) = −1 leaves no steady state.
func TestSeriesPoleAtRest(t *testing.T) {
	g := TF{Num: ascending(-1), Poles: reals(-1)}
	s := unity(Constant(dd.One, dd.Zero), g)
	for _, c := range [][]dd.Float{s.TrackingSeries(2), s.TrackingByCoefficients(2)} {
		if !math.IsInf(c[0].Float64(), 1) {
			t.Errorf("got %v", c)
		}
	}
}

// TestSeriesZeroController: L = 0: r − y = r.
func TestSeriesZeroController(t *testing.T) {
	s := unity(Constant(dd.Zero, dd.Zero), servo(1))
	wantSeries(t, "series", s.TrackingSeries(2), 1, 0)
	wantSeries(t, "coefficients", s.TrackingByCoefficients(2), 1, 0)
}
