package charts

import (
	"fmt"
	"math"
	"strings"

	"steadytick/study"
)

// The results here are invented: they have the shape of real ones and no machine behind them.

func yes(v bool) *bool { return &v }

var none = study.Figure{}

// answer is the step response of 1/(1 + 2ζ s/w + s²/w²) delayed by lag, at t.
func answer(t, lag, zeta, w float64) float64 {
	t -= lag
	if t <= 0 {
		return 0
	}
	wd := w * math.Sqrt(1-zeta*zeta)
	return 1 - math.Exp(-zeta*w*t)*(math.Cos(wd*t)+zeta*w/wd*math.Sin(wd*t))
}

// curve samples f at n points from 0 to end.
func curve(name string, n int, end float64, f func(float64) float64) study.Curve {
	c := study.Curve{Name: name}
	for i := range n {
		t := end * float64(i) / float64(n-1)
		c.X, c.Y = append(c.X, t), append(c.Y, f(t))
	}
	return c
}

// logCurve samples f at n points from low to high, evenly on a logarithmic axis.
func logCurve(name string, n int, low, high float64, f func(float64) float64) study.Curve {
	c := study.Curve{Name: name}
	for i := range n {
		x := low * math.Pow(high/low, float64(i)/float64(n-1))
		c.X, c.Y = append(c.X, x), append(c.Y, f(x))
	}
	return c
}

type variant struct {
	name         string
	zeta, period float64
	delay        float64
	stable       bool
}

var variants = []variant{
	{"continuous", 0.62, 0, 0, true},
	{"sampled at 2 kHz", 0.44, 5e-4, 1.46e-4, true},
	{"2x rate", 0.52, 2.5e-4, 1.46e-4, true},
	{"half rate", 0.31, 1e-3, 1.46e-4, true},
	{"quarter rate", 0.12, 2e-3, 1.46e-4, true},
	{"no delay", 0.49, 5e-4, 0, true},
	{"one tick more", 0.25, 5e-4, 6.46e-4, true},
}

// inputCurves invents the responses of the variants to a step (slope 0) or a ramp.
func inputCurves(label string, slope float64, all []variant) study.InputCurves {
	const end, w = 0.06, 420.0
	ref := func(t float64) float64 {
		if slope > 0 {
			return slope * t
		}
		return 1
	}
	in := study.InputCurves{Input: label, Response: []study.Curve{curve("reference", 200, end, ref)}}
	for _, v := range all {
		n := 700
		y := func(t float64) float64 {
			if slope > 0 {
				return slope * (t - 0.0021*answer(t, v.delay, v.zeta, w))
			}
			return answer(t, v.delay, v.zeta, w)
		}
		if !v.stable {
			y = func(t float64) float64 { return ref(t) + 0.01*math.Exp(300*t)*math.Sin(500*t) }
		}
		in.Response = append(in.Response, curve(v.name, n, end, y))
		in.Error = append(in.Error, curve(v.name, n, end, func(t float64) float64 { return ref(t) - y(t) }))
		if v.period > 0 {
			in.Added = append(in.Added, curve(v.name, n, end, func(t float64) float64 { return slope*(t-0.0021) + 0.98 - y(t) }))
		}
		ticks := n
		if v.period > 0 {
			ticks = int(end/v.period+0.5) + 1
		}
		u := curve(v.name, ticks, end, func(t float64) float64 { return 4.2*(ref(t)-y(t)) + 2*slope })
		u.Step = v.period > 0
		in.Effort = append(in.Effort, u)
		if strings.HasPrefix(v.name, "sampled") {
			dots := curve("sampled at 2 kHz, at the ticks", ticks, end, func(t float64) float64 { return ref(t) - y(t) })
			dots.Dots = true
			in.Error = append(in.Error, dots)
		}
	}
	return in
}

func degradeRows(label string, scale float64, all []variant) []study.DegradeRow {
	var out []study.DegradeRow
	for _, v := range all {
		r := study.DegradeRow{Input: label, Variant: v.name, Ran: true, Stable: v.stable,
			PeriodS: study.Fig(v.period), LoopDelayS: study.Fig(v.delay),
			PeakError: study.Fig(scale / v.zeta), RMSError: study.Fig(0.1234567890123 * scale / math.Sqrt(v.zeta)), SteadyError: study.Fig(0.0021 * scale)}
		if v.period == 0 {
			r.PeriodS, r.LoopDelayS = none, none
		}
		if !v.stable {
			r.PeakError, r.RMSError, r.SteadyError = study.Fig(math.Inf(1)), study.Fig(math.Inf(1)), none
			r.Note = "unstable: stopped at 1e6 times the input"
		}
		out = append(out, r)
	}
	return out
}

func column(stable bool) *study.Column {
	c := &study.Column{Stable: stable, StabilityByPoles: stable, StabilityByNyquist: stable, Type: 1,
		PositionConstant: study.Fig(math.Inf(1)), VelocityConstant: study.Fig(72.333333333333333), AccelerationConstant: study.Fig(0),
		TrackingSeries: [4]study.Figure{study.Fig(0), study.Fig(0.013824884792626729), study.Fig(-1.0231e-5), study.Fig(4.40231e-8)},
		LoopSeries:     [4]study.Figure{study.Fig(0), study.Fig(0.014224884792626729), study.Fig(-1.1e-5), study.Fig(3.3e-8)},
		Steady: []study.Steady{
			{Input: "step", Size: study.Fig(1), TrackingError: study.Fig(0), LoopError: study.Fig(0), WorstError: study.Fig(0), Ripple: study.Fig(0),
				Asymptote: &[3]study.Figure{study.Fig(0), study.Fig(0), study.Fig(0)}},
			{Input: "ramp", Size: study.Fig(2), TrackingError: study.Fig(0.027649769585253458), LoopError: study.Fig(0.028449769585253458),
				WorstError: study.Fig(0.0276501), Ripple: study.Fig(3.1e-7), Asymptote: &[3]study.Figure{study.Fig(0.027649769585253458), study.Fig(0), study.Fig(0)}},
			{Input: "parabola", Size: study.Fig(1.5), TrackingError: study.Fig(math.Inf(1)), LoopError: study.Fig(math.Inf(1)), WorstError: study.Fig(math.Inf(1)),
				Ripple: study.Fig(1.2e-6), EndError: study.Fig(0.169859), EndTimeS: study.Fig(1.71545), Asymptote: &[3]study.Figure{study.Fig(-1.53465e-5), study.Fig(0.020737327188940093), study.Fig(0)}},
			{Input: "sine", Size: study.Fig(0.4), FrequencyRadS: study.Fig(31.41592653589793), TrackingError: study.Fig(0.17), LoopError: study.Fig(0.18),
				WorstError: study.Fig(0.1702), Ripple: study.Fig(2e-5), PhaseDeg: study.Fig(64.2)},
		},
		PhaseMarginDeg: study.Fig(48.123456789012345), GainMarginDB: study.Fig(14.2), ModulusMargin: study.Fig(0.61803398874989485),
		DelayMarginS: study.Fig(0.0028), CrossoverRadS: study.Fig(298.7), BandwidthRadS: study.Fig(471.23889803846896), JitterMarginS: study.Fig(0.0019),
		GainCrossings:  []study.Crossing{{RadS: 298.7, Gain: 1, PhaseDeg: -131.876543, MarginDeg: study.Fig(48.123456789012345)}},
		PhaseCrossings: []study.Crossing{{RadS: 1510.25, Gain: 0.195, PhaseDeg: 180, MarginDB: study.Fig(14.2)}},
		Poles:          [][2]float64{{-2410.7, 0}, {-96.3, 0}, {-188.4, 241.9}, {-188.4, -241.9}},
		Transient: study.Transient{OvershootPercent: study.Fig(17.3), RiseTimeS: study.Fig(0.0045), SettlingTimeS: study.Fig(0.0213),
			PeakTimeS: study.Fig(0.0098), PeakEffort: study.Fig(80.18)},
	}
	if !stable {
		c.Steady = nil
		for _, s := range column(true).Steady {
			c.Steady = append(c.Steady, study.Steady{Input: s.Input, Size: s.Size, FrequencyRadS: s.FrequencyRadS})
		}
		c.TrackingSeries, c.LoopSeries = [4]study.Figure{}, [4]study.Figure{}
		c.PhaseMarginDeg, c.DelayMarginS, c.ModulusMargin, c.BandwidthRadS, c.JitterMarginS = study.Fig(-13.8), none, none, none, none
		c.Transient = study.Transient{}
	}
	return c
}

// winch is a calm result: everything stable, seven variants, three inputs.
func winch() *study.Compare {
	cont, samp := column(true), column(true)
	samp.PhaseMarginDeg, samp.ModulusMargin, samp.Transient.OvershootPercent = study.Fig(39.87654321), study.Fig(0.48), study.Fig(24.6)
	samp.EquivalentPoles = [][2]float64{{-2304.1, 0}, {-97.2, 0}, {-151.6, 262.3}, {-151.6, -262.3}}
	samp.Poles = [][2]float64{{0.31599, 0}, {0.95256, 0}, {0.91904, 0.12121}, {0.91904, -0.12121}}
	c := &study.Compare{Schema: "steadytick/compare/1", Loop: "winch drum angle", PeriodS: 5e-4, LoopDelayS: 1.46e-4,
		Continuous: cont, Sampled: samp, Maps: []study.MapNote{{Part: "model", Map: "tustin", Text: "invented <note>"}}, Units: study.Units{Output: "rad", Effort: "V"},
		Verdict: "At 2 kHz the sampled loop is stable but misses phase_margin >= 45 deg by 5.1 deg; of the 8.2 deg that it loses to the continuous loop, the hold costs 4.3 deg and the compute time 2.4 deg.",
		DelayLedger: []study.LedgerItem{{Item: "hold (T/2)", Seconds: 2.5e-4, Degrees: study.Fig(4.2785)}, {Item: "conversion", Seconds: 6e-6, Degrees: study.Fig(0.1027)},
			{Item: "compute", Seconds: 1.4e-4, Degrees: study.Fig(2.396)}, {Item: "waiting for the update instant", Seconds: 0, Degrees: study.Fig(0)},
			{Item: "dead time", Seconds: 0, Degrees: study.Fig(0)}, {Item: "sensor lag", Seconds: 4e-4, Degrees: study.Fig(6.81)}},
		Requirements: []study.Requirement{{Name: "ramp_error", Op: "<=", Limit: 0.03, Value: study.Fig(0.0276501), Met: yes(true), Unit: "rad"},
			{Name: "phase_margin", Op: ">=", Limit: 45, Value: study.Fig(39.87654321), Met: yes(false), Unit: "deg"},
			{Name: "overshoot", Op: "<=", Limit: 25, Value: study.Fig(24.6), Met: yes(true), Unit: "%"},
			{Name: "settling_time", Op: "<=", Limit: 0.04, Value: study.Fig(0.0213), Met: yes(true), Unit: "s"}},
		Warnings: []study.Warning{{Code: "sensor_dynamics", Text: "the sensor lags by 400 µs: the ramp tracking error is 1/Kv less that lag per unit of slope, and not 1/Kv"},
			{Code: "no_gain_reduction", Text: "gain reduction: the loop is not conditionally stable, the gain may fall to nothing"}},
		LoopFile: "loop: winch drum angle            # invented demo data\noutput: rad\neffort: V\n\nplant:\n  model: 0.31 / (s*(0.018*s + 0.09))\ncontroller:\n  model: 4.2*(0.21*s + 1)/(0.011*s + 1)\n  map: tustin\n",
		File:     "winch.yaml", Version: "0.1.0",
	}
	c.AsBuilt = asBuilt()
	for i := range c.Requirements {
		c.Requirements[i].From = []string{"sampled", "as built"}[i%2]
	}
	step, ramp := "step 1 rad", "ramp 2 rad/s"
	c.Degrade = append(degradeRows(step, 0.5, variants), degradeRows(ramp, 0.01, variants)...)
	c.Curves = &study.Curves{Inputs: []study.InputCurves{inputCurves(step, 0, variants), inputCurves(ramp, 2, variants)},
		NyquistRadS: math.Pi / 5e-4, RateHz: 2000}
	addLoopCurves(c)
	return c
}

// asBuilt is an invented loop on its hardware.
func asBuilt() *study.AsBuilt {
	b := &study.AsBuilt{Seed: 7, NoiseTicks: 20_000, Effort: study.Fig(0.41), Output: study.Fig(3.2e-4),
		Transient: study.Transient{OvershootPercent: study.Fig(26.25), RiseTimeS: study.Fig(0.0047), SettlingTimeS: none, PeakTimeS: study.Fig(0.0101),
			PeakEffort: study.Fig(24), RecoveryTimeS: study.Fig(0.0312)},
		Rest: &study.Rest{Starts: 12, Cycling: 3, LimitCycle: study.Fig(7.7e-4), PeriodS: study.Fig(0.0625), EffortPP: study.Fig(0.21875),
			Bound: none, StuckError: study.Fig(3.9e-4)}}
	for _, s := range column(true).Steady {
		b.Steady = append(b.Steady, study.BuiltSteady{Input: s.Input, Size: s.Size, TrackingError: study.Fig(0.0123), WorstError: study.Fig(0.0456),
			Swing: study.Fig(7.89e-4), Ripple: study.Fig(0.0021), AtLimit: s.Input == "parabola"})
	}
	b.Steady = append(b.Steady, study.BuiltSteady{Input: "move", PeakError: study.Fig(0.033), RMSError: study.Fig(0.011)})
	return b
}

// addLoopCurves invents frequency responses, poles and the curves over the rate.
func addLoopCurves(c *study.Compare) {
	gain := func(w float64) float64 { return 20 * math.Log10(298.7/w*400/math.Hypot(400, w)*1.25) }
	phase := func(lag float64) func(float64) float64 {
		return func(w float64) float64 { return -90 - (math.Atan(w/400)+w*lag)*180/math.Pi }
	}
	cu := c.Curves
	cu.GainDB = []study.Curve{logCurve("continuous", 400, 3, 3e4, gain), logCurve("sampled", 400, 3, cu.NyquistRadS, gain)}
	cu.PhaseDeg = []study.Curve{logCurve("continuous", 400, 3, 3e4, phase(0)), logCurve("sampled", 400, 3, cu.NyquistRadS, phase(3.96e-4))}
	poles := func(name string, all [][2]float64) study.Curve {
		p := study.Curve{Name: name, Dots: true}
		for _, z := range all {
			p.X, p.Y = append(p.X, z[0]), append(p.Y, z[1])
		}
		return p
	}
	if c.Continuous != nil {
		cu.Poles = append(cu.Poles, poles("continuous", c.Continuous.Poles))
	}
	cu.Poles = append(cu.Poles, poles("sampled", c.Sampled.EquivalentPoles))
	cu.PhaseMarginOverRate = []study.Curve{logCurve("sampled", 60, 250, 16000, func(f float64) float64 { return 48.1 - 298.7*(0.5/f+1.46e-4)*180/math.Pi }),
		logCurve("continuous", 2, 250, 16000, func(float64) float64 { return 48.1 })}
	cu.ErrorOverRate = []study.Curve{logCurve("ramp 2 rad/s", 60, 250, 16000, func(f float64) float64 { return 0.02765 + 0.3/f }),
		logCurve("sine 0.4 rad", 60, 250, 16000, func(f float64) float64 { return 0.17 + 20/f })}
	cu.RateWindow = []study.RateBar{{Requirement: "stable", Intervals: [][2]float64{{310, 16000}}},
		{Requirement: "phase_margin >= 45 deg", Intervals: [][2]float64{{4100, 16000}}},
		{Requirement: "overshoot <= 25 %", Intervals: [][2]float64{{1900, 16000}}},
		{Requirement: "ripple <= 0.0001 rad", Intervals: [][2]float64{{500, 700}, {900, 900}, {1200, 16000}}}}
}

const hostile = `</script><script>alert("x")</script> "quoted" \back\slash & <b>bold</b> {{.}} ${x} ` + "`tick` \u2028 <!--<script>"

// stormy is a hard result: no stable sampled loop, nulls and infinities, hostile and long names, 64
// poles, ten variants, long curves.
func stormy() *study.Compare {
	c := winch()
	long := strings.Repeat("a very long name of a loop that somebody typed without a thought for tables ", 2)
	c.Loop, c.Units = hostile, study.Units{Output: "<i>mm</i>", Effort: `"N"`}
	c.LoopFile, c.File, c.Verdict, c.Version = "loop: "+hostile+"\n", hostile+".yaml", "Unstable: "+hostile, hostile
	c.Sampled, c.AsBuilt = column(false), nil
	c.Sampled.Poles, c.Sampled.EquivalentPoles = nil, nil
	for k := range 32 {
		for _, sign := range []float64{1, -1} {
			re, im := -900+28*float64(k%40)-60*float64(k/8), sign*(2*float64(k)+1)*98
			c.Sampled.EquivalentPoles = append(c.Sampled.EquivalentPoles, [2]float64{re, im})
			c.Sampled.Poles = append(c.Sampled.Poles, [2]float64{math.Exp(re*5e-4) * math.Cos(im*5e-4), math.Exp(re*5e-4) * math.Sin(im*5e-4)})
		}
	}
	c.Warnings = []study.Warning{{Code: "unstable", Text: "the sampled loop is unstable: " + hostile}, {Code: hostile, Text: long + "delay margin"}}
	c.Requirements = append(c.Requirements, study.Requirement{Name: long, Op: "<", Limit: 1e-9, Unit: "s"})
	ten := append(append([]variant{}, variants...), variant{"eighth rate", 0.1, 4e-3, 1.46e-4, false}, variant{hostile, 0.3, 5e-4, 1e-3, true}, variant{long, 0.2, 5e-4, 1.2e-3, true})
	ten[1].stable = false
	label := "step 1 " + hostile
	c.Degrade = degradeRows(label, 0.5, ten)
	in := inputCurves(label, 0, ten)
	in.Error[0] = curve("continuous", 50_000, 0.06, func(t float64) float64 { return 1 - answer(t, 0, 0.62, 420) })
	c.Curves.Inputs = []study.InputCurves{in}
	c.Curves.RateWindow = append(c.Curves.RateWindow, study.RateBar{Requirement: long}, study.RateBar{Requirement: hostile, Intervals: [][2]float64{{300, 400}}})
	c.Curves.Poles = nil
	c.Curves.ErrorOverRate[0].Y[3] = 1e-6
	c.Curves.ErrorOverRate = append(c.Curves.ErrorOverRate, logCurve(hostile, 30, 250, 16000, func(f float64) float64 { return 1 / f }))
	addPoles(c)
	return c
}

func addPoles(c *study.Compare) {
	p := study.Curve{Name: "sampled", Dots: true}
	for _, z := range c.Sampled.EquivalentPoles {
		p.X, p.Y = append(p.X, z[0]), append(p.Y, z[1])
	}
	c.Curves.Poles = []study.Curve{{Name: "continuous", Dots: true, X: []float64{-96.3, -188.4, -188.4, -2410.7}, Y: []float64{0, 241.9, -241.9, 0}}, p}
}

// allIDs are the charts that a result with all curves has.
func allIDs(inputs int) []string {
	var ids []string
	for i := 1; i <= inputs; i++ {
		for _, n := range []string{"response", "error", "added", "effort"} {
			ids = append(ids, fmt.Sprintf("input-%d-%s", i, n))
		}
	}
	return append(ids, "loop-gain", "loop-phase", "closed-poles", "margin-over-rate", "error-over-rate", "rate-window")
}
