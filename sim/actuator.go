package sim

import "math"

// actuator is the way from the computed effort to the held one: limits, slew, quantizer.
// The slew runs on the effort before its quantization, so that a slow slew is not lost in it.
type actuator struct {
	limits    Limits
	converter Converter
	rise      float64 // largest change in a tick, +Inf for no limit
	last      float64
	limited   bool // some effort was
}

// hold returns the effort that will be held for the computed effort v.
func (a *actuator) hold(v float64) float64 {
	u := a.limits.clip(v)
	if u != v {
		a.limited = true
	}
	if u > a.last+a.rise {
		u = a.last + a.rise
	} else if u < a.last-a.rise {
		u = a.last - a.rise
	}
	a.last = u
	return a.converter.Value(u)
}

// deadband is what gets through a dead zone of half width d.
func deadband(u, d float64) float64 {
	switch {
	case u > d:
		return u - d
	case u < -d:
		return u + d
	}
	return 0
}

// play is what a part follows that has play of full width gap and stands at w, when it is driven to x.
func play(w, x, gap float64) float64 { return math.Max(math.Min(w, x+gap/2), x-gap/2) }
