package sim

import "math"

// lu is a square matrix factored by rows with the largest pivot of each column.
type lu struct {
	n    int
	v    []float64
	perm []int
}

// factor decomposes a (n×n, rows one after the other), which it overwrites; ok is false for a
// singular matrix.
func factor(a []float64, n int) (f *lu, ok bool) {
	f = &lu{n: n, v: a, perm: make([]int, n)}
	for k := range n {
		p := k
		for i := k + 1; i < n; i++ {
			if math.Abs(a[i*n+k]) > math.Abs(a[p*n+k]) {
				p = i
			}
		}
		f.perm[k] = p
		if p != k {
			for j := range n {
				a[k*n+j], a[p*n+j] = a[p*n+j], a[k*n+j]
			}
		}
		if v := math.Abs(a[k*n+k]); v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, false
		}
		top := a[k*n+k+1 : (k+1)*n]
		for i := k + 1; i < n; i++ {
			if a[i*n+k] == 0 {
				continue
			}
			m := a[i*n+k] / a[k*n+k]
			a[i*n+k] = m
			row := a[i*n+k+1 : (i+1)*n]
			for j, t := range top {
				row[j] -= m * t
			}
		}
	}
	return f, true
}

// solve overwrites b with the solution.
func (f *lu) solve(b []float64) {
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

// inverse of a small well-conditioned matrix, which it overwrites.
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
