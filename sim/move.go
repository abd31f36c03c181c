package sim

import (
	"fmt"
	"math"
)

// Move is a motion from rest at 0 to rest at distance that keeps
//
//	|velocity| <= v,  |acceleration| <= a,  |jerk| <= j
//
// in the shortest time: seven segments of jerk +j, 0, −j, 0, −j, 0, +j with the lengths tj, ta, tj,
// tv, tj, ta, tj. The peak acceleration is j·tj, the peak velocity w = j·tj·(tj+ta), and
//
//	tj = min( a/j, √(v/j), ∛(D/2j) )
//	ta = min( v/(j·tj) − tj, −3tj/2 + √(tj²/4 + D/(j·tj)) ), not below 0
//	tv = D/w − 2tj − ta, not below 0
//
// D = |distance|. tj is at the limit of acceleration, of velocity or of distance; ta
// reaches the limit of velocity or uses up the distance (the positive root of
// j·tj·(tj+ta)·(2tj+ta) = D). A jerk of +Inf gives the trapezoid of velocity. Duration is the end of
// the move; from there on the signal is exactly distance. Errors: ErrSignal when a limit is
// not positive or a number is not finite.
func Move(distance, velocity, acceleration, jerk float64) (Signal, error) {
	finite := func(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
	if !finite(distance) || !finite(velocity) || !finite(acceleration) || math.IsNaN(jerk) {
		return Signal{}, fmt.Errorf("%w for a move", ErrSignal)
	}
	if !(velocity > 0 && acceleration > 0 && jerk > 0) {
		return Signal{}, fmt.Errorf("%w: the limits of a move must be positive", ErrSignal)
	}
	if distance == 0 {
		return Zero(), nil
	}
	d := math.Abs(distance)
	tj, ta, tv := moveTimes(d, velocity, acceleration, jerk)
	if !finite(tj) || !finite(ta) || !finite(tv) || !(tj+ta > 0) {
		return Signal{}, fmt.Errorf("%w: the move is out of range", ErrSignal)
	}
	sign := math.Copysign(1, distance)
	if math.IsInf(jerk, 1) {
		return trapezoid(sign*d, sign*acceleration, ta, tv), nil
	}
	return sevenSegments(sign*d, sign*jerk, tj, ta, tv), nil
}

// moveTimes returns the three lengths. With the jerk without limit tj = 0 and
// the products j·tj are the acceleration.
func moveTimes(d, v, a, j float64) (tj, ta, tv float64) {
	if math.IsInf(j, 1) {
		ta = math.Min(v/a, math.Sqrt(d/a))
		return 0, ta, math.Max(0, d/(a*ta)-ta)
	}
	tj = math.Min(a/j, math.Min(math.Sqrt(v/j), math.Cbrt(d/j/2)))
	peak := j * tj
	ta = math.Min(v/peak-tj, -1.5*tj+math.Sqrt(tj*tj/4+d/peak))
	if tj < a/j || ta < 0 {
		ta = 0 // the limit of acceleration is not reached
	}
	return tj, ta, math.Max(0, d/(peak*(tj+ta))-2*tj-ta)
}

// sevenSegments writes the first half forward and the second as its mirror image,
// so that the start and the end are both exact.
func sevenSegments(d, j, tj, ta, tv float64) Signal {
	x1, v1, a1 := j*tj*tj*tj/6, j*tj*tj/2, j*tj
	x2, v2 := x1+ta*(v1+ta*a1/2), v1+ta*a1
	x3, v3 := x2+tj*(v2+tj*(a1/2-tj*j/6)), v2+tj*a1/2
	t := []float64{0, tj, tj + ta, 2*tj + ta}
	end := 2*t[3] + tv
	var s Signal
	s.add(0, [4]float64{0, 0, 0, j / 6})
	s.add(t[1], [4]float64{x1, v1, a1 / 2, 0})
	s.add(t[2], [4]float64{x2, v2, a1 / 2, -j / 6})
	s.add(t[3], [4]float64{x3, v3, 0, 0})
	s.add(t[3]+tv, [4]float64{d - x3, v3, 0, -j / 6})
	s.add(end-t[2], [4]float64{d - x2, v2, -a1 / 2, 0})
	s.add(end-t[1], [4]float64{d - x1, v1, -a1 / 2, j / 6})
	s.add(end, [4]float64{d, 0, 0, 0})
	s.duration = end
	return s
}

// trapezoid is the move without a limit of jerk.
func trapezoid(d, a, ta, tv float64) Signal {
	x, v := a*ta*ta/2, a*ta
	var s Signal
	s.add(0, [4]float64{0, 0, a / 2, 0})
	s.add(ta, [4]float64{x, v, 0, 0})
	s.add(ta+tv, [4]float64{d - x, v, -a / 2, 0})
	s.add(2*ta+tv, [4]float64{d, 0, 0, 0})
	s.duration = 2*ta + tv
	return s
}
