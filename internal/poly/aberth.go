package poly

import (
	"fmt"
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
)

// ConvergenceError says that an iteration stopped at its cap.
type ConvergenceError struct {
	Near     dd.Complex // the worst approximation
	Residual float64    // its last relative correction |Δx|/|x|
	Left     int        // how many roots had not converged
	Sweeps   int
}

func (e *ConvergenceError) Error() string {
	return fmt.Sprintf("%d roots not converged after %d sweeps: near %v the last relative correction is %.3g",
		e.Left, e.Sweeps, e.Near.Complex128(), e.Residual)
}

// sweeper runs the Ehrlich–Aberth iteration (Ehrlich 1967, Aberth 1973)
//
//	x_i ← x_i − N_i/(1 − N_i·S_i),  N = p(x_i)/p'(x_i),  S_i = Σ_{j≠i} 1/(x_i − x_j)
//
// Positions are double-double, corrections float64: a correction with a relative
// error of 1e-15 still gains 15 digits in a step.
type sweeper struct {
	x    []dd.Complex
	done []bool
	last []float64 // last relative correction of each
}

func newSweeper(x []dd.Complex) *sweeper {
	return &sweeper{x: append([]dd.Complex(nil), x...), done: make([]bool, len(x)), last: make([]float64, len(x))}
}

// run sweeps until step has called every root done, at most limit times.
// step returns N in units of 2^e and whether x_i is to be left as it is.
func (s *sweeper) run(limit int, step func(i int) (newton complex128, e int, done bool)) bool {
	for range limit {
		left := 0
		for i := range s.x {
			if s.done[i] {
				continue
			}
			n, e, done := step(i)
			if done {
				s.done[i] = true
				continue
			}
			left++
			s.move(i, n, e)
		}
		if left == 0 {
			return true
		}
	}
	return false
}

// move applies the correction of x_i. A correction longer than twice |x_i| is
// cut: far from the roots N may be large without meaning.
func (s *sweeper) move(i int, n complex128, e int) {
	w := n / (1 - n*s.repulsion(i, e))
	x := s.x[i]
	size := x.Ldexp(-e).Abs()
	if size == 0 {
		size = 1
	}
	length := cmplx.Abs(w)
	if math.IsNaN(length) || math.IsInf(length, 0) {
		// p' = 0 or coincident points: step aside in a direction that depends on i.
		w, length = cmplx.Rect(0.1*size, float64(i+1)), 0.1*size
	}
	if length > 2*size {
		w *= complex(2*size/length, 0)
	}
	s.last[i] = length / size
	s.x[i] = x.Sub(dd.FromComplex(w).Ldexp(e))
}

// repulsion is Σ 1/(x_i − x_j) in units of 2^-e. Coincident points and those
// too far away to matter are left out.
func (s *sweeper) repulsion(i, e int) complex128 {
	scale := math.Ldexp(1, -e)
	a := s.x[i]
	var sum complex128
	for j, b := range s.x {
		if j == i {
			continue
		}
		d := difference(a, b)
		re, im := real(d)*scale, imag(d)*scale
		q := re*re + im*im
		if q == 0 || math.IsInf(q, 0) {
			continue
		}
		sum += complex(re/q, -im/q)
	}
	return sum
}

// difference is a − b, of full float64 accuracy also for close points.
func difference(a, b dd.Complex) complex128 {
	return complex((a.Re.Hi-b.Re.Hi)+(a.Re.Lo-b.Re.Lo), (a.Im.Hi-b.Im.Hi)+(a.Im.Lo-b.Im.Lo))
}

func (s *sweeper) failure(limit int) error {
	e := &ConvergenceError{Sweeps: limit}
	for i, done := range s.done {
		if !done {
			e.Left++
			if !(s.last[i] < e.Residual) {
				e.Near, e.Residual = s.x[i], s.last[i]
			}
		}
	}
	return e
}

// Sweep caps. Simple roots take about 10 to 25 sweeps; a cluster converges
// linearly, by about a third to a half a sweep, from 1e-5 to 1e-16 in below 60.
const (
	singleSweeps  = 60
	doubleSweeps  = 250
	generalSweeps = 400
)

// Aberth improves start to as many roots of an analytic function, one for each
// starting point. eval returns the function and its derivative. A root is taken as
// converged when its correction is below 2^-98 of |x|, when the function is
// exactly zero there, or when the correction has been below 1e-4 of |x| and has not
// shrunk for 20 sweeps: the noise of eval is reached, as in a cluster (1e-5 for a
// sixfold root in double-double). The accuracy is then that noise, and not known here.
// The roots come in the order of the starting points. The error is a *ConvergenceError;
// with it comes the state reached.
func Aberth(eval func(x dd.Complex) (p, dp dd.Complex), start []dd.Complex) ([]dd.Complex, error) {
	s := newSweeper(start)
	best := make([]float64, len(start))
	stale := make([]int, len(start))
	for i := range best {
		best[i], s.last[i] = math.Inf(1), math.Inf(1)
	}
	ok := s.run(generalSweeps, func(i int) (complex128, int, bool) {
		stale[i]++
		if s.last[i] < best[i] {
			best[i], stale[i] = s.last[i], 0
		}
		if best[i] < 0x1p-98 || best[i] < 1e-4 && stale[i] >= 20 {
			return 0, 0, true
		}
		p, dp := eval(s.x[i])
		if p.IsZero() {
			return 0, 0, true
		}
		e := 0
		if !s.x[i].IsZero() {
			e = binade(s.x[i])
		}
		return p.Div(dp).Ldexp(-e).Complex128(), e, false
	})
	if !ok {
		return s.x, s.failure(generalSweeps)
	}
	return s.x, nil
}
