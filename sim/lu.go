package sim

import "math"

// lu is a square matrix with its factors, the pivot of each column being the largest entry.
type lu struct {
	n       int
	a, v    []float64 // the matrix, its factors; rows one after the other
	perm    []int
	x, rest []float64
	used    int       // times solved for, see twin.solution
	op      *operator // built when used often
}

// factor decomposes a (n×n, rows one after the other), which it keeps; ok is false for a
// singular matrix.
func factor(a []float64, n int) (f *lu, ok bool) {
	v := append([]float64(nil), a...)
	f = &lu{n: n, a: a, v: v, perm: make([]int, n), x: make([]float64, n), rest: make([]float64, n)}
	for k := range n {
		p := k
		for i := k + 1; i < n; i++ {
			if math.Abs(v[i*n+k]) > math.Abs(v[p*n+k]) {
				p = i
			}
		}
		f.perm[k] = p
		if p != k {
			for j := range n {
				v[k*n+j], v[p*n+j] = v[p*n+j], v[k*n+j]
			}
		}
		if top := math.Abs(v[k*n+k]); top == 0 || math.IsNaN(top) || math.IsInf(top, 0) {
			return nil, false
		}
		f.eliminate(k)
	}
	return f, true
}

// eliminate takes row k from the rows below it.
func (f *lu) eliminate(k int) {
	n, v := f.n, f.v
	top := v[k*n+k+1 : (k+1)*n]
	for i := k + 1; i < n; i++ {
		if v[i*n+k] == 0 {
			continue
		}
		m := v[i*n+k] / v[k*n+k]
		v[i*n+k] = m
		row := v[i*n+k+1 : (i+1)*n]
		for j, t := range top {
			row[j] -= m * t
		}
	}
}

// solve overwrites b with the solution. One step of refinement in the same precision makes the
// error small in each row by itself (Skeel, 1980), so that small unknowns keep their digits
// beside large ones.
func (f *lu) solve(b []float64) {
	n := f.n
	copy(f.x, b)
	f.substitute(f.x)
	for i := range n {
		sum := b[i]
		for j, v := range f.a[i*n : (i+1)*n] {
			sum -= v * f.x[j]
		}
		f.rest[i] = sum
	}
	f.substitute(f.rest)
	for i := range n {
		b[i] = f.x[i] + f.rest[i]
	}
}

func (f *lu) substitute(b []float64) {
	n := f.n
	for k, p := range f.perm {
		b[k], b[p] = b[p], b[k]
	}
	for i := range n {
		sum := b[i]
		for j, v := range f.v[i*n : i*n+i] {
			sum -= v * b[j]
		}
		b[i] = sum
	}
	for i := n - 1; i >= 0; i-- {
		sum := b[i]
		row := f.v[i*n : (i+1)*n]
		for j := i + 1; j < n; j++ {
			sum -= row[j] * b[j]
		}
		b[i] = sum / row[i]
	}
}

// inverse of a small well-conditioned matrix.
func inverse(a []float64, n int) []float64 {
	f, ok := factor(a, n)
	if !ok {
		panic("sim: singular matrix of a fixed table") // no input reaches this
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
