package lti

import (
	"math"
	"sort"
)

// keepBelow: of a loop with delay, crossings of −180° more than 30 dB below the
// one that sets the gain margin are not searched for.
var keepBelow = math.Log(1 / 31.6)

// maxBeyond bounds the crossings listed beyond all corners: gain that does not fall (a biproper
// loop with dead time) gives endlessly many.
const maxBeyond = 64

// phaseCrossings returns the ν in (0, ∞) where L(jν) is negative real, ascending,
// by the unwrapped phase and the certain search of isolate.go. A phase that rides on
// −180° (a double integrator without more) has none. With dead time there is no end of them:
// beyond all corners the list goes on until keepBelow is passed, for maxBeyond crossings
// at most. With any delay, crossings of smaller gain than keepBelow may be
// left out, and those beyond all corners that lie far below the last gain
// crossing lastGain (0: none).
func (p *plane) phaseCrossings(lastGain float64) []float64 {
	if p.ridesOnReversal() {
		return nil
	}
	p.evals = searchBudget
	c := curve{at: p.phase, bend: p.phaseBend, base: math.Pi, step: 2 * math.Pi}
	best := math.Inf(-1) // the greatest log|L| < 0 at a crossing so far
	if p.dead != 0 || p.ticks > 8 {
		c.skip = func(lo, hi float64) bool { return p.gainBelow(lo, hi, best+keepBelow) }
	}
	var out []float64
	add := func(found []float64) {
		for _, nu := range found {
			if f, _ := p.gain(nu); f < 0 {
				best = math.Max(best, f)
			}
		}
		out = append(out, found...)
	}
	from := p.leaving(c.at, p.lowEnd())
	for _, cut := range p.corners() {
		if cut > from && len(out) < maxLevels {
			add(c.crossings(from, cut, &p.evals))
			from = cut
		}
	}
	if p.dead != 0 {
		if lastGain > from {
			add(c.crossings(math.Max(from, lastGain-4*math.Pi/p.dead), lastGain, &p.evals))
			from = lastGain
		}
		for range maxBeyond {
			found := p.firstBeyond(c, from)
			if len(found) == 0 {
				break
			}
			add(found)
			if f, _ := p.gain(found[0]); f < best+keepBelow {
				break
			}
			// past the rounding of the phase (1e-16 of ντ), or the same crossing is found again
			from = found[0] * (1 + 1e-9)
		}
	} else {
		far := curve{at: p.farPhase, bend: p.farPhaseBend, base: math.Pi, step: 2 * math.Pi}
		if c.skip != nil {
			far.skip = func(lo, hi float64) bool { return lo > 0 && p.gainBelow(1/hi, 1/lo, best+keepBelow) }
		}
		tail := far.crossings(p.leaving(far.at, 1/(4*float64(p.count())*p.large)), 1/p.farStart(), &p.evals)
		for i := len(tail) - 1; i >= 0; i-- {
			add([]float64{1 / tail[i]})
		}
	}
	p.exhausted = p.exhausted || p.evals <= 0
	sort.Float64s(out)
	return out
}

// gainBelow tells whether log|L| is certainly below level on [lo, hi].
func (p *plane) gainBelow(lo, hi, level float64) bool {
	if math.IsInf(level, -1) || !(lo > 0) {
		return false
	}
	m := middle(lo, hi)
	h := math.Max(m-lo, hi-m)
	f, df := p.gain(m)
	return f+math.Abs(df)*h+p.gainBend(lo, hi)*h*h/2 < level
}

// firstBeyond returns the first crossings beyond ν = from, where the dead time's −τν
// soon outruns the N factors: they turn by N·π/2 at most, so that a window of (N+4)·π/τ
// holds a crossing.
func (p *plane) firstBeyond(c curve, from float64) []float64 {
	window := math.Pi * float64(p.count()+4) / p.dead
	for range 4 {
		if f := c.crossings(from, from+window/8, &p.evals); len(f) > 0 {
			return f[:1]
		}
		from += window / 8
	}
	c.skip = nil
	f := c.crossings(from, from+window, &p.evals)
	return f[:min(len(f), 1)]
}

// leaving returns where to begin near t = 0: the phase tends to a multiple of π/2
// there, and when that is a level, its distance from it counts only once it is above
// rounding (1e-10 against 1e-14). t is at most end.
func (p *plane) leaving(at func(float64) (float64, float64), end float64) float64 {
	for t := end * 0x1p-40; t < end; t *= 2 {
		f, _ := at(t)
		if math.Abs(math.Remainder(f-math.Pi, 2*math.Pi)) > 1e-10 {
			return t
		}
	}
	return end
}

// ridesOnReversal tells whether L is real and of one sign at every frequency.
func (p *plane) ridesOnReversal() bool {
	if p.dead != 0 || p.ticks != 0 {
		return false
	}
	for _, nu := range p.probes() {
		if f, _ := p.phase(nu); !(math.Abs(math.Sin(f)) <= touching) {
			return false
		}
	}
	return true
}
