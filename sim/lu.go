package sim

import (
	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// lu is a square matrix with its triangular factors, by partial pivoting.
type lu struct {
	n       int
	a, v    blas64.General // the matrix, its factors
	perm    []int
	x, rest []float64
	used    int       // times solved for, see twin.solution
	op      *operator // built when used often
}

// general is a as a matrix of gonum, sharing its numbers.
func general(a []float64, n int) blas64.General {
	return blas64.General{Rows: n, Cols: n, Stride: max(n, 1), Data: a}
}

// factor decomposes a (n×n, rows one after the other), which it keeps; ok is false for a
// singular matrix, or one that is not finite.
func factor(a []float64, n int) (f *lu, ok bool) {
	if !finite(a) {
		return nil, false
	}
	f = &lu{
		n: n, a: general(a, n), v: general(append([]float64(nil), a...), n),
		perm: make([]int, n), x: make([]float64, n), rest: make([]float64, n),
	}
	return f, n == 0 || lapack64.Getrf(f.v, f.perm)
}

// solve overwrites b with the solution. One step of refinement in the same precision makes the
// error small in each row by itself (Skeel, 1980), so that small unknowns keep their digits
// beside large ones.
func (f *lu) solve(b []float64) {
	if f.n == 0 {
		return
	}
	copy(f.x, b)
	f.substitute(f.x)
	copy(f.rest, b)
	blas64.Gemv(blas.NoTrans, -1, f.a, vector(f.x), 1, vector(f.rest))
	f.substitute(f.rest)
	for i := range b {
		b[i] = f.x[i] + f.rest[i]
	}
}

func vector(x []float64) blas64.Vector { return blas64.Vector{N: len(x), Data: x, Inc: 1} }

func (f *lu) substitute(b []float64) {
	lapack64.Getrs(blas.NoTrans, f.v, blas64.General{Rows: f.n, Cols: 1, Stride: 1, Data: b}, f.perm)
}

// inverse of a small well-conditioned matrix.
func inverse(a []float64, n int) []float64 {
	f, ok := factor(a, n)
	if !ok {
		panic("singular matrix of a fixed table") // no input reaches this
	}
	out := make([]float64, n*n)
	col := make([]float64, n)
	for j := range n {
		clear(col)
		col[j] = 1
		f.solve(col)
		for i, v := range col {
			out[i*n+j] = v
		}
	}
	return out
}
