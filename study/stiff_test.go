package study

import (
	"math"
	"testing"
)

// A plant far faster than the tick has its whole transient right after the switch of the effort.
// At steady state the effort is a staircase of steps du a tick, so within a tick
//
//	e(θ) = e0 + θ − h(θ)·1   with h the plant's unit step response, du = T = 1
//
// h(θ) = 1 − ((a−z)e^(−θ/a) − (b−z)e^(−θ/b))/(a−b) for (zs+1)/((as+1)(bs+1)), by partial
// fractions; here scanned on a logarithmic grid.
func TestRippleOfAPlantFasterThanTheTick(t *testing.T) {
	const a, b, z = 1e-5, 1e-4, 1e-3
	c := compared(t, loopFile("plant: {model: (0.001*s + 1)/((1e-5*s + 1)*(1e-4*s + 1))}", "controller: {model: 0.8/s, map: backward}",
		"timing: {rate: 1 Hz, compute: 0 s}", "inputs: [{ramp: 1}]"))
	low, high := 0.0, 0.0
	for i := range 400001 {
		th := math.Pow(10, -7+7*float64(i)/400000)
		d := th - (1 - ((a-z)*math.Exp(-th/a)-(b-z)*math.Exp(-th/b))/(a-b))
		low, high = math.Min(low, d), math.Max(high, d)
	}
	s := c.Sampled.Steady[0]
	// grid of ratio 1+4e-5: the extremes are missed by the square of that
	near(t, "ripple", s.Ripple.Value, high-low, 2e-8)
	near(t, "worst error", s.WorstError.Value, math.Max(math.Abs(1.25+low), math.Abs(1.25+high)), 2e-8)
	// one lag: τ(1 + ln(1/τ)) below 1
	c = compared(t, loopFile("plant: {model: 1/(1e-6*s + 1)}", "controller: {model: 0.2/s, map: backward}",
		"timing: {rate: 1 Hz, compute: 0 s}", "inputs: [{ramp: 1}]"))
	near(t, "ripple of one lag", c.Sampled.Steady[0].Ripple.Value, 1-1e-6*(1+math.Log(1e6)), 1e-8)
	if len(c.Warnings) > 0 {
		t.Errorf("warnings %v", c.Warnings)
	}
}

// A plant that passes nothing at rest, s/((s+1)(0.1s+1)): for a ramp the effort is a staircase of equal
// steps, so the ripple stays. Closed form by the sum of all past step responses.
func TestRippleOfAPlantWithAZeroAtRest(t *testing.T) {
	const T = 0.05
	c := compared(t, loopFile("plant: {model: s/((s+1)*(0.1*s+1))}", "controller: {model: 2}", "timing: {rate: 20 Hz, compute: 2 ms}", "inputs: [{ramp: 1}]"))
	// y is constant at the ticks, so u rises by 2T a tick. The step response of 10s/((s+1)(s+10)) is
	// (10/9)(e^(−t) − e^(−10t)); of steps at since, since + T, … ago the geometric sums are
	sum := func(since float64) float64 {
		return 2 * T * 10 / 9 * (math.Exp(-since)/(1-math.Exp(-T)) - math.Exp(-10*since)/(1-math.Exp(-10*T)))
	}
	low, high := math.Inf(1), math.Inf(-1)
	for i := range 100001 {
		y := sum(T * float64(i) / 100000)
		low, high = math.Min(low, y), math.Max(high, y)
	}
	near(t, "ripple", c.Sampled.Steady[0].Ripple.Value, high-low, 1e-9)
}

// First order with a gain of 1e-12: the shape does not depend on the gain, closed form ln 9 and ln 50.
func TestStepFiguresAtATinyGain(t *testing.T) {
	f := compared(t, loopFile("plant: {model: 1e-9/(s + 1)}", "controller: {model: 1e-3}", "timing: {rate: 10 Hz, compute: 0 s}", "inputs: [{step: 1}]")).Continuous.Transient
	near(t, "rise time", f.RiseTimeS.Value, math.Log(9), 1e-9)
	near(t, "settling time", f.SettlingTimeS.Value, math.Log(50), 1e-9)
	near(t, "overshoot", f.OvershootPercent.Value, 0, 0)
}

// The rms of a move is over the move: a slow pole and zero side by side, which lengthen the
// run, hardly change it.
func TestRMSIsOverTheMove(t *testing.T) {
	rms := func(controller string) float64 {
		c := compared(t, loopFile("plant: {model: 1/(s*(0.01*s + 1))}", "controller: {model: "+controller+", map: tustin}",
			"timing: {rate: 1 kHz, compute: 0 s}", "inputs: [{move: {distance: 1, velocity: 2, acceleration: 10, jerk: 200}}]"))
		return c.Sampled.Steady[0].RMSError.Value
	}
	short, long := rms("20"), rms("20*(s + 0.01)/(s + 0.0099)")
	near(t, "rms with a slow dipole", long, short, 0.02*short) // the dipole changes the gain by 1 %
}
