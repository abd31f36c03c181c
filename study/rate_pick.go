package study

import (
	"fmt"
	"math"
	"math/big"
	"slices"
	"sort"
)

// reserve is how far above the slowest rate the recommended one lies where the window is wide: an octave gives back most of
// what sampling costs, for the delay has halved; what is faster still costs processor time and gains little. Our own choice.
const reserve = 2

// choose picks the recommended rate from the widest interval of the window in which the timer makes one.
func (j *rateJob) choose() error {
	if len(j.window) == 0 {
		j.r.PickNote = "no rate meets all requirements"
		return nil
	}
	j.warnFileTimer()
	for _, span := range j.byWidth() {
		if p, period := j.pickFrom(span); p != nil {
			return j.confirm(p, period)
		}
	}
	j.r.PickNote = "the timer makes no rate of the window"
	return nil
}

// pickFrom picks a rate from one interval of the window, nil where the timer makes none of it.
func (j *rateJob) pickFrom(span rateSpan) (*Pick, *big.Rat) {
	lo, hi := math.Max(span.low, j.lo), math.Min(span.high, j.hi)
	from, name := lo, "the slowest rate"
	if span.low == 0 {
		name = "the slowest rate looked at"
	}
	if mode := j.fastestMode(); 2*mode > from && 2*mode < hi {
		from, name = 2*mode, fmt.Sprintf("%s, below which samples fold the plant's mode at %s", hertzText(2*mode), hertzText(mode))
	}
	target, middle := math.Sqrt(from*hi), true
	if reserve*from < target {
		target, middle = reserve*from, false
	}
	wanted, moved := j.roundRate(target, from, hi)
	p := &Pick{WantedHz: hertz(wanted), Settings: []TimerSetting{}, Below: []Break{}, Above: []Break{}}
	p.Reason = pickReason(p.WantedHz, from, lo, name, moved, middle)
	period := new(big.Rat).Inv(wanted)
	if t := j.l.Timer; t != nil {
		at, ok := timerSetting(t, wanted, new(big.Rat).SetFloat64(lo), new(big.Rat).SetFloat64(hi))
		if !ok {
			return nil, nil
		}
		s := at.setting(wanted)
		if math.Abs(s.ErrorPPM) > farSetting {
			p.Reason = fmt.Sprintf("the timer's rate of the window nearest to %s, which is %s", hertzText(p.WantedHz), p.Reason)
		}
		p.Timer = &s
		period = at.period()
	}
	p.RateHz, p.PeriodS = hertz(new(big.Rat).Inv(period)), seconds(period)
	p.SlowestHz, p.FastestHz = Figure{span.low, span.low > 0}, Figure{span.high, !math.IsInf(span.high, 1)}
	j.breaks(p, span)
	return p, period
}

// farSetting: a setting further than 1 % from the rate wanted, in ppm, is said to be another rate.
const farSetting = 1e4

// warnFileTimer tells when the timer of the file cannot make the rate of the file.
func (j *rateJob) warnFileTimer() {
	if j.l.Timer == nil {
		return
	}
	own := new(big.Rat).Inv(j.l.Timing.Period)
	at, ok := timerSetting(j.l.Timer, own, nil, nil)
	if !ok {
		return
	}
	if s := at.setting(own); s.ErrorPPM != 0 {
		j.r.warn("timer_misses_file_rate", "the timer does not make the file's rate of %s exactly: the nearest is %.9g Hz (prescaler %d, reload %d), %s ppm off",
			hertzText(hertz(own)), s.RateHz, s.Prescaler, s.Reload, number(s.ErrorPPM))
	}
}

// pickReason says why a rate was picked: how it lies to the rate from that it must not go below, and what it was moved for.
func pickReason(rate, from, slowest float64, name, moved string, middle bool) string {
	reason := "about twice " + name
	if ratio := rate / from; ratio < 1.6 || ratio > 2.5 {
		reason = fmt.Sprintf("%.2g times %s", ratio, name)
	}
	reason += ", a reserve for the tolerances of the parts"
	if middle {
		reason = "near the geometric middle of the window"
		if from > slowest {
			reason += " above " + name
		}
	}
	if moved != "" {
		reason += ", moved so that " + moved + " does not fold into the bandwidth"
	}
	return reason
}

// fastestMode is the highest frequency of the plant's lightly damped modes, Hz; 0 for none.
func (j *rateJob) fastestMode() float64 {
	most := 0.0
	for _, w := range j.sweep.swinging() {
		most = math.Max(most, w/(2*math.Pi))
	}
	return most
}

// warnFoldedMode tells when the pick lies below twice a lightly damped mode of the plant: the loop then works because the mode folds to where it does
// no harm, and a small change of it can end that.
func (j *rateJob) warnFoldedMode() {
	for _, w := range j.sweep.swinging() {
		if f := w / (2 * math.Pi); f > j.r.Pick.RateHz/2 {
			j.r.warn("folded_mode", "at the pick, %s, the samples see the plant's mode at %s folded to %s: the window there rests on where it folds to, and a small change of the mode can end it; a rate above %s would see it as it is",
				hertzText(j.r.Pick.RateHz), hertzText(f), hertzText(folded(f, j.r.Pick.RateHz)), hertzText(2*f))
		}
	}
}

// byWidth are the intervals of the window by the ratio of their ends, the widest first, the slowest first of equal ones.
func (j *rateJob) byWidth() []rateSpan {
	width := func(s rateSpan) float64 { return math.Min(s.high, j.hi) / math.Max(s.low, j.lo) }
	out := slices.Clone(j.window)
	slices.SortStableFunc(out, func(a, b rateSpan) int { return compareFloat(width(b), width(a)) })
	return out
}

// roundSteps are the rates of a decade that people choose.
var roundSteps = []float64{1, 1.2, 1.25, 1.5, 1.6, 2, 2.4, 2.5, 3, 3.2, 4, 5, 6, 8}

// roundRate is the round rate nearest to target in ratio, well inside lo and hi (a twentieth of their ratio from each), at which no declared
// disturbance folds into the bandwidth, if there is such a rate; else one at which some does; the target to three digits, else as
// it is, where no round rate is inside. moved names a disturbance that another round rate was left for.
func (j *rateJob) roundRate(target, lo, hi float64) (rate *big.Rat, moved string) {
	margin := math.Pow(hi/lo, 0.05)
	inside := func(f float64) bool { return f >= lo*margin && f <= hi/margin }
	nearest := func(allowed func(float64) bool) float64 {
		best := 0.0
		for e := math.Floor(math.Log10(lo)) - 1; e <= math.Log10(hi)+1; e++ {
			for _, m := range roundSteps {
				f := m * math.Pow(10, e)
				if inside(f) && allowed(f) && (best == 0 || math.Abs(math.Log(f/target)) < math.Abs(math.Log(best/target))) {
					best = f
				}
			}
		}
		return best
	}
	first := nearest(func(float64) bool { return true })
	free := func(f float64) bool { return j.foldsInside(f) == "" }
	best := nearest(free)
	if first > 0 && (best == 0 || math.Abs(math.Log(best/target)) > farMove) {
		if f := nearbyRate(target, func(f float64) bool { return inside(f) && free(f) }); f > 0 {
			best = f
		}
	}
	switch {
	case best == 0:
		best = first
	case best != first:
		moved = j.foldsInside(first)
	}
	if best == 0 {
		unit := math.Pow(10, math.Floor(math.Log10(target))-2)
		if best = math.Round(target/unit) * unit; !inside(best) {
			return new(big.Rat).SetFloat64(target), ""
		}
	}
	// The decimal number that is meant, not the binary one beside it.
	r, ok := new(big.Rat).SetString(fmt.Sprintf("%.3g", best))
	if !ok || !inside(hertz(r)) {
		return new(big.Rat).SetFloat64(best), moved
	}
	return r, moved
}

// farMove: rather than move further than this from the target, in logarithm, a rate of two digits is taken.
const farMove = 0.25

// nearbyRate is the allowed rate of two digits nearest to the target, faster ones first, within a factor of 1.6; 0 for none.
func nearbyRate(target float64, allowed func(float64) bool) float64 {
	for k := 0.0; k < 0.47; k += 0.01 {
		for _, side := range [2]float64{1, -1} {
			x := target * math.Exp(side*k)
			unit := math.Pow(10, math.Floor(math.Log10(x))-1)
			if f := math.Round(x/unit) * unit; allowed(f) {
				return f
			}
		}
	}
	return 0
}

// foldsInside names a declared disturbance above half the rate that lands inside the bandwidth of the continuous loop, "" for none.
func (j *rateJob) foldsInside(rate float64) string {
	b := j.cont.bandwidth()
	if !b.OK {
		return ""
	}
	for _, d := range j.l.Disturbances {
		if d.Frequency == nil {
			continue
		}
		if f := hertz(d.Frequency) / (2 * math.Pi); f > rate/2 && 2*math.Pi*folded(f, rate) < foldGuard*b.Value {
			return disturbanceName(d)
		}
	}
	return ""
}

// foldGuard: a sampled loop has up to about twice the bandwidth of the continuous one before its margins are gone.
const foldGuard = 2

// sameBound: bounds nearer than this, relative, are one bound: what breaks there breaks together.
const sameBound = 1e-9

// breaks lists what breaks going down and up from the pick, nearest first, and what ends the interval.
func (j *rateJob) breaks(p *Pick, span rateSpan) {
	for i, c := range j.list {
		if !j.judges(c) {
			continue
		}
		for _, s := range j.spans[i] {
			if !(p.RateHz >= s.low && p.RateHz <= s.high) {
				continue
			}
			if s.low > 0 {
				p.Below = append(p.Below, Break{c.text, s.low, s.low / p.RateHz})
			}
			if !math.IsInf(s.high, 1) {
				p.Above = append(p.Above, Break{c.text, s.high, s.high / p.RateHz})
			}
		}
	}
	// Causes first among equals: what cannot run is not stable, what is not stable meets nothing.
	rank := map[string]int{j.list[1].text: 0, j.list[0].text: 1}
	order := func(list []Break, nearer func(a, b float64) bool) {
		sort.SliceStable(list, func(a, b int) bool {
			x, y := list[a], list[b]
			if math.Abs(x.RateHz-y.RateHz) <= sameBound*x.RateHz {
				return rankOf(rank, x) < rankOf(rank, y)
			}
			return nearer(x.RateHz, y.RateHz)
		})
	}
	p.Below, p.Above = withoutEffects(p.Below, rank), withoutEffects(p.Above, rank)
	order(p.Below, func(a, b float64) bool { return a > b })
	order(p.Above, func(a, b float64) bool { return a < b })
	if len(p.Below) > 0 {
		p.BindsBelow = p.Below[0].Requirement
	}
	if len(p.Above) > 0 {
		p.BindsAbove = p.Above[0].Requirement
	}
}

// sameCause: what breaks within this of the end of stability, relative, breaks because of it.
const sameCause = 1e-6

// withoutEffects leaves out what breaks where the loop stops running or being stable, and stability where the loop stops running: one
// line is enough for one cause.
func withoutEffects(list []Break, rank map[string]int) []Break {
	out := []Break{}
	for _, b := range list {
		caused := false
		for _, c := range list {
			if rankOf(rank, c) < min(rankOf(rank, b), len(rank)) && math.Abs(c.RateHz-b.RateHz) <= sameCause*b.RateHz {
				caused = true
			}
		}
		if !caused {
			out = append(out, b)
		}
	}
	return out
}

func rankOf(rank map[string]int, b Break) int {
	if n, ok := rank[b.Requirement]; ok {
		return n
	}
	return len(rank)
}

// confirm analyses the loop at the very period of the pick, as compare does, and takes its ledger and its warnings. A pick that
// does not hold there is withdrawn.
func (j *rateJob) confirm(p *Pick, period *big.Rat) error {
	l, why := j.sweep.loopAt(j.l, period)
	if why != "" {
		j.r.PickNote = "the loop cannot run at the rate picked: " + why
		return nil
	}
	c, err := RunCompare(j.ctx, l, Options{})
	if err != nil {
		return err
	}
	for _, q := range c.Requirements {
		if q.Met != nil && !*q.Met && q.From == asBuilt {
			j.r.warn("as_built_misses", "at the pick, %s: the loop as built has %s = %s %s and misses its requirement: what the file declares of the hardware makes the difference, and the windows, which are those of the sampled loop, do not contain it; compare --rate tells more",
				hertzText(p.RateHz), q.Name, figureText(q.Value), q.Unit)
			continue
		}
		if q.Met != nil && !*q.Met {
			j.r.PickNote = fmt.Sprintf("at %s, the rate picked, %s is not met after all: it lies too close to a bound", hertzText(p.RateHz), q.Name)
			return nil
		}
	}
	for _, w := range c.Warnings {
		w.Text = "at the pick, " + hertzText(p.RateHz) + ": " + w.Text
		if w.Code != "no_continuous_column" {
			j.r.Warnings = append(j.r.Warnings, w)
		}
	}
	if j.l.Timer != nil {
		p.Settings = j.settingsAround(p, period)
	}
	j.r.DelayLedger = c.DelayLedger
	j.r.Pick = p
	j.warnFoldedMode()
	return nil
}

const (
	// around the pick are settings up to this ratio away.
	around = 1.7
	// toldApart: settings whose rates differ by less, relative, are one to the loop.
	toldApart = 1e-3
)

// settingsAround lists timer settings of the window beside the pick: the next rates that the timer makes, where they can be told
// apart, and those of round rates.
func (j *rateJob) settingsAround(p *Pick, period *big.Rat) []TimerSetting {
	out := []TimerSetting{}
	add := func(s TimerSetting) {
		apart := math.Abs(s.RateHz-p.RateHz) > toldApart*p.RateHz && inSpans(j.window, s.RateHz)
		for _, x := range out {
			apart = apart && math.Abs(x.RateHz-s.RateHz) > toldApart*s.RateHz
		}
		if apart {
			out = append(out, s)
		}
	}
	for _, at := range timerNear(j.l.Timer, period, 2) {
		add(at.setting(at.rate()))
	}
	for e := math.Floor(math.Log10(p.RateHz / around)); e <= math.Log10(p.RateHz*around); e++ {
		for _, m := range roundSteps {
			wanted, ok := new(big.Rat).SetString(fmt.Sprintf("%ge%g", m, e))
			if f := m * math.Pow(10, e); !ok || f < p.RateHz/around || f > p.RateHz*around {
				continue
			}
			if at, ok := timerSetting(j.l.Timer, wanted, nil, nil); ok {
				add(at.setting(wanted))
			}
		}
	}
	slices.SortFunc(out, func(a, b TimerSetting) int { return compareFloat(a.RateHz, b.RateHz) })
	return out
}

func compareFloat(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// withRateOf is the loop at the rate of the pick, or of the file without one.
func (j *rateJob) chosenHz() float64 {
	if j.r.Pick != nil {
		return j.r.Pick.RateHz
	}
	return j.r.FileRateHz
}
