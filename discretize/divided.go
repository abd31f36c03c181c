package discretize

import (
	"math"
	"math/big"
	"sync"

	"steadytick/internal/dd"
)

// maxNodes bounds the size of an expTable; 1/k! is tabulated to maxNodes + 30.
const maxNodes = 124

// inverseFactorials holds 1/k!.
var inverseFactorials = sync.OnceValue(func() []dd.Float {
	out := make([]dd.Float, maxNodes+31)
	f := big.NewInt(1)
	for k := range out {
		if k > 1 {
			f = new(big.Int).Mul(f, big.NewInt(int64(k)))
		}
		out[k] = dd.FromRat(new(big.Rat).SetFrac(big.NewInt(1), f))
	}
	return out
})

// table is a lower triangular matrix, entries [i][j] with j <= i.
type table [][]dd.Complex

// expTable returns all divided differences of exp over consecutive nodes,
//
//	E[i][j] = exp[x_j, …, x_i],  0 <= j <= i < n
//
// which is the exponential of the matrix with x on the diagonal and ones below
// it. Equal and nearly equal nodes need no special case. (Opitz, 1964; McCurdy,
// Ng, Parlett, "Accurate computation of divided differences of the exponential
// function", Mathematics of Computation 43, 1984; both from memory.)
//
// Method: nodes halved s times until |y| <= 1/2; Taylor,
//
//	exp[y_j, …, y_i] = Σ_m h_m(y_j, …, y_i)/(m+i−j)!,   h_m complete homogeneous
//
// and s doublings, the diagonal set to e^y afresh at each so that the growth of
// errors does not compound:
//
//	exp[2y_j, …, 2y_i] = 2^(j−i) Σ_k exp[y_k, …, y_i]·exp[y_j, …, y_k]
//
// For real nodes every E is positive and the doubling adds positive terms only.
// Relative error of an entry about (s+n)·n·2^-104 then, and |x|·2^-104 more where nodes are
// imaginary; hold equivalents made from it agree with 300-digit ones to 4e-31 at
// |x| = 5e4, n = 13 (TestReference, "twelve, mixed"). len(x) is at most maxNodes (a larger one is a bug in the caller).
func expTable(x []dd.Complex) table {
	r, s := 0.0, 0
	for _, v := range x {
		r = math.Max(r, v.Abs())
	}
	for r > 0.5 {
		r /= 2
		s++
	}
	y := make([]dd.Complex, len(x))
	scaleNodes(y, x, -s)
	e := taylorTable(y, taylorTerms(r))
	setDiagonal(e, y)
	for ; s > 0; s-- {
		e = doubled(e)
		scaleNodes(y, x, 1-s)
		setDiagonal(e, y)
	}
	return e
}

// taylorTerms returns the number of terms after which r^m/m!, which bounds each
// term of the Taylor sum relative to its first, is below 2^-108 (dd.Eps/16).
func taylorTerms(r float64) int {
	t := 1.0
	for m := 1; m < 30; m++ {
		t *= r / float64(m)
		if t < 0x1p-108 {
			return m
		}
	}
	return 30 // 0.5^30/30! = 3.5e-42
}

func scaleNodes(y, x []dd.Complex, n int) {
	f := math.Ldexp(1, n)
	for i, v := range x {
		y[i] = dd.Complex{Re: twofold(v.Re, f), Im: twofold(v.Im, f)}
	}
}

// twofold returns a·f for f a power of two, which is exact.
func twofold(a dd.Float, f float64) dd.Float { return dd.Float{Hi: a.Hi * f, Lo: a.Lo * f} }

// taylorTable sums the Taylor series column by column with h_m kept in place:
//
//	h_m(y_j, …, y_i) = h_m(y_j, …, y_(i−1)) + y_i·h_(m−1)(y_j, …, y_i)
func taylorTable(y []dd.Complex, terms int) table {
	w := inverseFactorials()
	n := len(y)
	e := newTable(n)
	h := make([]dd.Complex, terms)
	for j := range n {
		clear(h)
		h[0] = dd.Complex{Re: dd.One}
		for i := j; i < n; i++ {
			for m := 1; m < terms; m++ {
				h[m] = h[m].Add(mulNode(h[m-1], y[i]))
			}
			var sum dd.Complex
			for m := terms - 1; m >= 0; m-- {
				sum = sum.Add(h[m].Scale(w[m+i-j]))
			}
			e[i][j] = sum
		}
	}
	return e
}

// mulNode returns a·y, with half the work when y is real.
func mulNode(a, y dd.Complex) dd.Complex {
	if y.Im.Hi == 0 {
		return a.Scale(y.Re)
	}
	return a.Mul(y)
}

func doubled(e table) table {
	g := newTable(len(e))
	for i := range e {
		for j := range i {
			var sum dd.Complex
			for k := j; k <= i; k++ {
				sum = sum.Add(e[i][k].Mul(e[k][j]))
			}
			f := math.Ldexp(1, j-i)
			g[i][j] = dd.Complex{Re: twofold(sum.Re, f), Im: twofold(sum.Im, f)}
		}
	}
	return g
}

// setDiagonal puts e^y on the diagonal; a node equal or conjugate to the one
// before it gets the same or the conjugate bits.
func setDiagonal(e table, y []dd.Complex) {
	for i, v := range y {
		switch {
		case v.IsZero():
			e[i][i] = dd.Complex{Re: dd.One}
		case i > 0 && v == y[i-1]:
			e[i][i] = e[i-1][i-1]
		case i > 0 && v == y[i-1].Conj():
			e[i][i] = e[i-1][i-1].Conj()
		default:
			e[i][i] = dd.CExp(v)
		}
	}
}

func newTable(n int) table {
	flat := make([]dd.Complex, n*(n+1)/2)
	t := make(table, n)
	for i := range t {
		t[i], flat = flat[:i+1:i+1], flat[i+1:]
	}
	return t
}
