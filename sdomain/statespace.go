package sdomain

import (
	"fmt"
	"math/big"

	"steadytick/internal/exact"
)

// MaxStates bounds FromStateSpace: the work grows with the fourth power of the states.
const MaxStates = 40

// ShapeError says that the matrices do not fit together.
type ShapeError struct{ Matrix, Want string }

func (e *ShapeError) Error() string { return fmt.Sprintf("matrix %s must be %s", e.Matrix, e.Want) }

// FromStateSpace returns C·(sI − A)^(−1)·B + D of a system with one input and one
// output: A n×n, B n×1, C 1×n, D 1×1, rows first, n from 0 to MaxStates. Nothing is
// cancelled, so a mode that is not controllable or not observable stays as a hidden mode
// (but a zero transfer function has no modes at all).
// Errors: *ShapeError, *exact.SizeError.
func FromStateSpace(a, b, c, d [][]*big.Rat) (Model, error) {
	n := len(a)
	if n > MaxStates {
		return Model{}, &exact.SizeError{What: "number of states", Got: n, Limit: MaxStates}
	}
	shapes := []struct {
		name       string
		m          [][]*big.Rat
		rows, cols int
	}{{"A", a, n, n}, {"B", b, n, 1}, {"C", c, 1, n}, {"D", d, 1, 1}}
	for _, s := range shapes {
		if !hasShape(s.m, s.rows, s.cols) {
			return Model{}, &ShapeError{s.name, fmt.Sprintf("%d×%d (one input, one output, %d states)", s.rows, s.cols, n)}
		}
	}
	num, den := leverrier(a, b, c)
	num = num.Add(den.Scale(d[0][0]))
	r, err := exact.FromPolys(num, den)
	if err != nil {
		return Model{}, err
	}
	return checked(r, new(big.Rat))
}

func hasShape(m [][]*big.Rat, rows, cols int) bool {
	if rows > 0 && cols > 0 && len(m) != rows {
		return false
	}
	for _, row := range m {
		if len(row) != cols {
			return false
		}
	}
	return true
}

// leverrier returns C·adj(sI − A)·B and det(sI − A) by Faddeev and Le Verrier
// (Gantmacher, The Theory of Matrices 1, IV.4; from memory):
//
//	M_1 = I,  a_n = 1;   a_(n−k) = −trace(A·M_k)/k,   M_(k+1) = A·M_k + a_(n−k)·I
//	det(sI − A) = Σ a_k·s^k,   adj(sI − A) = Σ_{k=1..n} M_k·s^(n−k)
//
// It works with the integer matrix q·A, q a common denominator, where the
// divisions by k are exact: the k-th coefficients are then those of A times q^k.
func leverrier(a, b, c [][]*big.Rat) (num, den exact.Poly) {
	n := len(a)
	ai, q := integerMatrix(a)
	bi, qb := integerMatrix(b)
	ci, qc := integerMatrix(c)
	den, num = make(exact.Poly, n+1), make(exact.Poly, n)
	den[n] = big.NewRat(1, 1)
	m := identity(n)
	scale := big.NewInt(1) // q^(k−1)
	for k := 1; k <= n; k++ {
		// C·M_k·B
		v := product(product(ci, m), bi)[0][0]
		num[n-k] = new(big.Rat).SetFrac(v, new(big.Int).Mul(scale, new(big.Int).Mul(qb, qc)))
		scale = new(big.Int).Mul(scale, q)
		m = product(ai, m)
		trace := new(big.Int)
		for i := range m {
			trace.Add(trace, m[i][i])
		}
		trace.Quo(trace, big.NewInt(int64(-k)))
		den[n-k] = new(big.Rat).SetFrac(trace, scale)
		for i := range m {
			m[i][i].Add(m[i][i], trace)
		}
	}
	return exact.NewPoly(num...), den
}

// integerMatrix returns an integer matrix and q > 0 with a = result/q.
func integerMatrix(a [][]*big.Rat) (out [][]*big.Int, q *big.Int) {
	q = big.NewInt(1)
	for _, row := range a {
		for _, v := range row {
			g := new(big.Int).GCD(nil, nil, q, v.Denom())
			q.Mul(q, g.Quo(v.Denom(), g))
		}
	}
	for _, row := range a {
		var r []*big.Int
		for _, v := range row {
			x := new(big.Int).Quo(q, v.Denom())
			r = append(r, x.Mul(x, v.Num()))
		}
		out = append(out, r)
	}
	return out, q
}

func identity(n int) [][]*big.Int {
	out := make([][]*big.Int, n)
	for i := range out {
		out[i] = make([]*big.Int, n)
		for j := range out[i] {
			out[i][j] = new(big.Int)
		}
		out[i][i].SetInt64(1)
	}
	return out
}

// product returns a·b; the result shares no numbers with a or b.
func product(a, b [][]*big.Int) [][]*big.Int {
	out := make([][]*big.Int, len(a))
	var t big.Int
	for i, row := range a {
		out[i] = make([]*big.Int, len(b[0]))
		for j := range out[i] {
			s := new(big.Int)
			for k, v := range row {
				if v.Sign() != 0 {
					s.Add(s, t.Mul(v, b[k][j]))
				}
			}
			out[i][j] = s
		}
	}
	return out
}
