package sim

import "math"

// closed Newton–Cotes weights over p equal parts of length 1, for p = 1 to 6 (Abramowitz and
// Stegun 25.4.1 to 25.4.18; from memory, the tests integrate the powers they are exact for).
var newtonCotes = [7][]float64{
	1: {1. / 2, 1. / 2},
	2: {1. / 3, 4. / 3, 1. / 3},
	3: {3. / 8, 9. / 8, 9. / 8, 3. / 8},
	4: {14. / 45, 64. / 45, 24. / 45, 64. / 45, 14. / 45},
	5: {95. / 288, 375. / 288, 250. / 288, 250. / 288, 375. / 288, 95. / 288},
	6: {41. / 140, 216. / 140, 27. / 140, 272. / 140, 27. / 140, 216. / 140, 41. / 140},
}

// roundParts is the number of parts used where p are wished: at least 1, beyond 6 a
// multiple of 4.
func roundParts(p int) int {
	switch {
	case p < 1:
		return 1
	case p > 6:
		return (p + 3) / 4 * 4
	}
	return p
}

// quadrature returns the weights for parts (from roundParts) over an interval of the length.
func quadrature(parts int, length float64) []float64 {
	h := length / float64(parts)
	w := make([]float64, parts+1)
	p := parts
	if parts > 6 {
		p = 4
	}
	for at := 0; at < parts; at += p {
		for i, v := range newtonCotes[p] {
			w[at+i] += v * h
		}
	}
	return w
}

// errorSum gathers peak and rms of the tracking error over all points looked at.
// The rms is the root of ∫e²dt over the time, by closed Newton–Cotes rules over the points of
// each interval between events, where e is smooth.
type errorSum struct {
	peak, peakTime float64
	square, carry  float64 // ∫e²dt, compensated
	time           float64
}

func (s *errorSum) look(t, e float64) {
	if a := math.Abs(e); a > s.peak {
		s.peak, s.peakTime = a, t
	}
}

// add adds v to ∫e²dt, what rounding drops being kept (Knuth's exact sum).
func (s *errorSum) add(v float64) {
	sum := s.square + v
	back := sum - s.square
	s.carry += (s.square - (sum - back)) + (v - back)
	s.square = sum
}

func (s *errorSum) rms() float64 {
	if s.time <= 0 {
		return 0
	}
	return math.Sqrt(math.Max(0, s.square+s.carry) / s.time)
}
