package sim

import (
	"fmt"
	"math"

	"steadytick/internal/dd"
)

// flow propagates a linear system whose inputs are themselves the outputs of an
// autonomous system: held values (S = 0), the derivatives of a polynomial, or a sine pair,
//
//	x' = A·x + B·w,   w' = S·w
//
// over any time, exactly: x(t+h) = x + E·(x, w), with E the top rows of
// e^([A B; 0 S]·h) − I. w is given afresh at the start of every step.
type flow struct {
	n, m  int    // states, inputs
	aug   square // [A B; 0 S], inputs scaled by powers of two
	scale []float64
	norm  float64 // of aug
	byExp map[int]*advance
	dx    []float64 // scratch of advanceBy and series: a flow serves one run
	work  [3][]float64
}

// advance is one prepared step: x += E·z, z = (x, w).
type advance struct {
	n int
	e [][4]float64 // E in blocks of four rows (the last filled up with zeros), each block by columns
}

// newFlow takes A (n×n), B (n×m) and S (m×m) row by row.
func newFlow(n, m int, a, b, s []float64) *flow {
	f := &flow{n: n, m: m, scale: make([]float64, m), byExp: map[int]*advance{}}
	size := 0.0
	for i := range n {
		sum := 0.0
		for _, v := range a[i*n : (i+1)*n] {
			sum += math.Abs(v)
		}
		size = math.Max(size, sum)
	}
	if size == 0 {
		size = 1
	}
	N := n + m
	f.aug = square{N, make([]dd.Float, N*N)}
	for j := range m {
		f.scale[j] = columnScale(b, m, j, size)
		if f.scale[j] == 0 && j > 0 {
			f.scale[j] = f.scale[j-1] // a derivative of the input before it
		} else if f.scale[j] == 0 {
			f.scale[j] = 1
		}
	}
	for i := range n {
		for j := range n {
			f.aug.v[i*N+j] = dd.New(a[i*n+j])
		}
		for j := range m {
			f.aug.v[i*N+n+j] = dd.New(b[i*m+j] * f.scale[j])
		}
	}
	for i := range m {
		for j := range m {
			// w = scale·w̃, so S̃ = scale⁻¹·S·scale.
			f.aug.v[(n+i)*N+n+j] = dd.New(s[i*m+j] / f.scale[i] * f.scale[j])
		}
	}
	f.norm = f.aug.norm()
	return f
}

// columnScale is the power of two that brings column j of b to the size of A, so
// that a large input gain does not cost squarings; 0 for a column of zeros.
func columnScale(b []float64, m, j int, size float64) float64 {
	most := 0.0
	for i := j; i < len(b); i += m {
		most = math.Max(most, math.Abs(b[i]))
	}
	if most == 0 {
		return 0
	}
	_, e := math.Frexp(size / most)
	return math.Ldexp(1, e-1)
}

// step prepares a step of h seconds. Error: a growth that overflows.
func (f *flow) step(h dd.Float) (*advance, error) {
	e := expm1(f.aug, h)
	N := f.n + f.m
	out := &advance{n: f.n, e: make([][4]float64, (f.n+3)/4*N)}
	for i := range f.n {
		for j := range N {
			v := e.v[i*N+j].Float64()
			if j >= f.n {
				v /= f.scale[j-f.n]
			}
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return nil, fmt.Errorf("the plant grows beyond the range of the arithmetic within %g s", h.Hi)
			}
			out.e[i/4*N+j][i%4] = v
		}
	}
	return out, nil
}

// apply does x += E·z on z = (x, w), what rounding drops being kept in carry for the next time: else
// a slow state under fast ticks would stand still one rounding short of each increment, 1e-9
// off at λT = 1e-7. dx is scratch for the states filled up to fours.
func (p *advance) apply(z, carry, dx []float64) {
	if p.n <= 4 {
		p.applyFour(z, carry)
		return
	}
	e, N := p.e, len(z)
	for i := 0; i+4 <= len(dx); i += 4 {
		var a, b, c, d float64
		cols := e[:N]
		for j, v := range z {
			q := &cols[j]
			a += q[0] * v
			b += q[1] * v
			c += q[2] * v
			d += q[3] * v
		}
		e = e[N:]
		r := (*[4]float64)(dx[i:])
		r[0], r[1], r[2], r[3] = a, b, c, d
	}
	accumulate(z[:p.n], carry, dx)
}

// applyFour is apply for at most four states.
func (p *advance) applyFour(z, carry []float64) {
	if p.n == 0 {
		return
	}
	var a, b, c, d float64
	cols := p.e[:len(z)]
	for j, v := range z {
		q := &cols[j]
		a += q[0] * v
		b += q[1] * v
		c += q[2] * v
		d += q[3] * v
	}
	if p.n == 4 && len(z) >= 4 && len(carry) >= 4 {
		x, r := (*[4]float64)(z), (*[4]float64)(carry)
		x[0], r[0] = exactSum(x[0], a+r[0])
		x[1], r[1] = exactSum(x[1], b+r[1])
		x[2], r[2] = exactSum(x[2], c+r[2])
		x[3], r[3] = exactSum(x[3], d+r[3])
		return
	}
	dx := [4]float64{a, b, c, d}
	for i := range p.n {
		z[i], carry[i] = exactSum(z[i], dx[i]+carry[i])
	}
}

// exactSum is v + y and what rounding drops of it (Knuth's exact sum).
func exactSum(v, y float64) (s, dropped float64) {
	s = v + y
	t := s - v
	return s, (v - (s - t)) + (y - t)
}

// accumulate does x += d with the part that rounding drops kept in carry (Knuth's exact sum).
func accumulate(x, carry, d []float64) {
	carry, d = carry[:len(x)], d[:len(x)]
	for i, v := range x {
		y := d[i] + carry[i]
		s := v + y
		t := s - v
		x[i] = s
		carry[i] = (v - (s - t)) + (y - t)
	}
}

// scratch is what apply needs.
func (f *flow) scratch() []float64 { return make([]float64, (f.n+3)/4*4) }

// advanceBy propagates by any h >= 0: the binary digits of h by prepared steps of
// 2^k seconds, kept, and the rest, where norm·h <= 1/4, by the series. w is taken along; carry as
// in apply. Error as for step.
func (f *flow) advanceBy(z, carry []float64, h float64) error {
	if f.dx == nil {
		f.dx = f.scratch()
		for i := range f.work {
			f.work[i] = make([]float64, f.n+f.m)
		}
	}
	dx := f.dx
	w := z[f.n:]
	for h*f.norm > 0.25 {
		_, k := math.Frexp(h)
		k--
		p, ok := f.byExp[k]
		if !ok {
			var err error
			if p, err = f.step(dd.New(math.Ldexp(1, k))); err != nil {
				return err
			}
			f.byExp[k] = p
		}
		p.apply(z, carry, dx)
		f.turn(w, math.Ldexp(1, k))
		h -= math.Ldexp(1, k)
	}
	f.series(z, carry, h)
	return nil
}

// series adds Σ (M·h)^k/k!·z for norm·h <= 1/4: 14 terms leave 4^-14/14! = 4e-20.
func (f *flow) series(z, carry []float64, h float64) {
	N := f.n + f.m
	v, next, sum := f.work[0], f.work[1], f.work[2]
	clear(sum)
	copy(v, z)
	for j := f.n; j < N; j++ {
		v[j] /= f.scale[j-f.n]
	}
	for k := 1; k <= 14; k++ {
		for i := range next {
			s := 0.0
			for j, a := range f.aug.v[i*N : (i+1)*N] {
				s += a.Hi * v[j]
			}
			next[i] = s * h / float64(k)
			sum[i] += next[i]
		}
		v, next = next, v
	}
	accumulate(z[:f.n], carry, sum)
	for j := f.n; j < N; j++ {
		z[j] += sum[j] * f.scale[j-f.n]
	}
}

// turn propagates w alone by h: its system is nilpotent (at most degree 3) or a sine
// pair, so its exponential is taken afresh only for the inputs that move.
func (f *flow) turn(w []float64, h float64) {
	N := f.n + f.m
	for i := 0; i < f.m; i++ {
		// A moving input i is followed by its derivative in i+1 (chain) or paired with it (sine).
		up := f.entry(N, i, i+1)
		if up == 0 {
			continue
		}
		if down := f.entry(N, i+1, i); down != 0 {
			om := math.Sqrt(-up * down)
			s, c := math.Sincos(om * h)
			r := math.Sqrt(-up / down)
			w[i], w[i+1] = w[i]*c+w[i+1]*s*r, w[i+1]*c-w[i]*s/r
			i++
			continue
		}
		sum, p := 0.0, 1.0
		for k := 1; i+k < f.m && f.entry(N, i+k-1, i+k) != 0; k++ {
			p *= h / float64(k) * f.entry(N, i+k-1, i+k)
			sum += p * w[i+k]
		}
		w[i] += sum
	}
}

// entry is S[i][j] unscaled, 0 outside.
func (f *flow) entry(N, i, j int) float64 {
	if i >= f.m || j >= f.m {
		return 0
	}
	return f.aug.v[(f.n+i)*N+f.n+j].Hi * f.scale[i] / f.scale[j]
}
