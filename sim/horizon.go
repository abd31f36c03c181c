package sim

import "math"

// Horizon is a sensible time to look at a response, in seconds, from the real part of
// the dominant closed-loop pole in rad/s (of ln(z)/T when sampled), the delay around
// the loop and the shortest time worth showing (some periods):
//
//	stable:    12/|σ| + 3·delay      the slowest mode falls to e⁻¹² = 6e-6
//	unstable:  7/σ + 3·delay         the fastest one grows by e⁷ = 1100
//	σ = 0:     100·(delay + shortest)
//
// never less than shortest and never more than 1e6 times it, where shortest > 0. A σ that is
// not a number counts as 0.
func Horizon(sigma, delay, shortest float64) float64 {
	delay = math.Max(delay, 0)
	t := 100 * (delay + shortest)
	switch {
	case sigma < 0:
		t = 12/-sigma + 3*delay
	case sigma > 0:
		t = 7/sigma + 3*delay
	}
	if shortest > 0 {
		t = math.Max(shortest, math.Min(t, 1e6*shortest))
	}
	return t
}
