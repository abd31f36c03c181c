package sim

import "math"

// Encoder counts marks Count apart. The marks lie half a count to either side of 0, so that a position is
// rounded to the nearest whole count. Velocity comes from the counts of a tick,
//
//	m = (n − n before)·Count/period
//
// or, by time, from the counts between the last marks seen at two samples,
//
//	m = (n − n before)·Count/(time of the last mark − that before)
//
// and while no further mark comes, it is no more than the mark that could just have come allows,
// Count/(time since the last one). A clock cuts times to its whole periods.
type Encoder struct {
	Count    float64 // units of the position
	Output   int     // of the system: the position
	Velocity bool    // the number given is a velocity, else the position
	ByTime   bool
	Clock    float64 // Hz, 0 for times without error
}

func (e *Encoder) valid() bool {
	return e.Count > 0 && e.Clock >= 0 && finite([]float64{e.Count, e.Clock})
}

// Counts is the whole count at a position.
func (e *Encoder) Counts(at float64) float64 { return math.Floor(at/e.Count + 0.5) }

// encoderState is an encoder while it runs.
type encoderState struct {
	*Encoder
	counts         float64 // at the sample before; by time, when the mark then was seen
	mark, markThen float64 // instant of the last mark; that at the sample before
	velocity       float64 // what the last marks gave
}

func (s *encoderState) read(at, now, period float64) float64 {
	n := s.Counts(at)
	if !s.Velocity {
		return n * s.Count
	}
	moved := (n - s.counts) * s.Count
	if !s.ByTime {
		s.counts = n
		return moved / period
	}
	last := s.tick(s.mark)
	then := s.markThen
	if last != then { // else counts wait until the clock can tell their marks from those before
		s.counts, s.markThen = n, last
		s.velocity = moved / (last - then)
		return s.velocity
	}
	silent := s.tick(now) - last
	if moved != 0 || silent <= 0 {
		return s.velocity // the clock cannot tell yet
	}
	if most := s.Count / silent; math.Abs(s.velocity) > most {
		return math.Copysign(most, s.velocity)
	}
	return s.velocity
}

// tick is the time as the clock shows it.
func (e *Encoder) tick(t float64) float64 {
	if e.Clock == 0 {
		return t
	}
	return math.Floor(t*e.Clock) / e.Clock
}

// follow notes the last mark passed in a stretch of h seconds from t, given positions and their slopes at
// both ends and, for any time within, the position with its slope. A reversal inside is found where
// the slopes tell of it: the stretches of a run are short against what a plant does.
func (s *encoderState) follow(t, h, p0, d0, p1, d1 float64, at func(theta float64) (p, d float64)) {
	if d0*d1 < 0 {
		turn := rootOf(func(x float64) float64 { _, d := at(x); return d }, 0, h, d0, d1)
		p, _ := at(turn)
		s.pass(t, 0, turn, p0, p, at)
		s.pass(t, turn, h, p, p1, at)
		return
	}
	s.pass(t, 0, h, p0, p1, at)
}

// pass looks for the last mark between θ = a and b, where the position does not turn.
func (s *encoderState) pass(t, a, b, pa, pb float64, at func(theta float64) (p, d float64)) {
	from, to := s.Counts(pa), s.Counts(pb)
	if from == to {
		return
	}
	mark := (to - 0.5) * s.Count
	if to < from {
		mark = (to + 0.5) * s.Count
	}
	s.mark = t + rootOf(func(x float64) float64 { p, _ := at(x); return p - mark }, a, b, pa-mark, pb-mark)
}
