package study

import (
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/internal/poly"
	"steadytick/internal/reference"
	"steadytick/loop"
)

// zCoefficients expands a sampled transfer function in z and rounds each coefficient once to
// float64: the best that double precision can store. Ascending powers.
func zCoefficients(l lti.TF) (num, den []float64) {
	inZ := func(p poly.Poly) []float64 { // δ = (z − 1)/T
		var out poly.Poly
		step := poly.Poly{dd.One.Neg().Div(l.Period), dd.One.Div(l.Period)}
		for i := len(p) - 1; i >= 0; i-- {
			out = out.Mul(step).Add(poly.Const(p[i]))
		}
		f := make([]float64, len(out))
		for i, c := range out {
			f[i] = c.Float64()
		}
		return f
	}
	return inZ(l.Num.Shift(l.OriginZeros)), inZ(poly.FromRoots(l.Poles).Shift(l.OriginPoles))
}

// atOne is Σ k(k−1)…·c_k, the m-th derivative of the polynomial at z = 1.
func atOne(c []float64, m int) float64 {
	s := 0.0
	for k, v := range c {
		for j := range m {
			v *= float64(k - j)
		}
		s += v
	}
	return s
}

// outside is how many roots the companion matrix in double precision puts outside the unit circle.
func outside(t *testing.T, c []float64) int {
	n := len(c) - 1
	a := mat.NewDense(n, n, nil)
	for i := range n {
		if i > 0 {
			a.Set(i, i-1, 1)
		}
		a.Set(i, n-1, -c[i]/c[n])
	}
	var e mat.Eigen
	if !e.Factorize(a, mat.EigenNone) {
		t.Fatal("the eigenvalues of the companion matrix did not converge")
	}
	count := 0
	for _, z := range e.Values(nil) {
		if cmplx.Abs(z) > 1 {
			count++
		}
	}
	return count
}

// At fast rates the coefficients of a loop polynomial in z, even correctly rounded,
// no longer hold the loop: its acceleration constant is off by orders of magnitude, or it looks
// unstable. The program must give the truth (260-digit arithmetic, testdata/reference) there.
func TestDoublePrecisionCoefficientsAreNonsense(t *testing.T) {
	seen := map[string]bool{}
	for _, e := range reference.Load(t) {
		period, _ := e.PeriodS.Float64()
		want := e.Expect.Sampled
		if e.Order < 5 || want.Type != 2 || period > 1e-5 || !want.Stable {
			continue
		}
		t.Run(e.Name, func(t *testing.T) {
			l, problems := loop.Parse(e.Name, []byte(e.Loop), nil)
			if len(problems) > 0 {
				t.Fatal(problems)
			}
			_, a, err := bothColumns(l, &Compare{})
			if err != nil {
				t.Fatal(err)
			}
			col := a.column(l)
			truth := want.Ka.Float64()
			if !(math.Abs(col.AccelerationConstant.Value-truth) <= constantsTarget*truth) || !col.Stable {
				t.Errorf("Ka %.15g stable %v, want %.15g and stable", col.AccelerationConstant.Value, col.Stable, truth)
			}
			num, den := zCoefficients(a.block.open)
			naive := atOne(num, 0) / (atOne(den, 2) / 2) / (period * period)
			closed := append([]float64(nil), den...)
			for i, v := range num {
				closed[i] += v
			}
			unstable := outside(t, closed)
			t.Logf("truth Ka = %.6g and stable; double-precision coefficients give Ka = %.6g and %d roots outside the unit circle", truth, naive, unstable)
			if math.Abs(naive-truth) <= 0.01*truth && unstable == 0 {
				t.Error("double precision does well here: the loop is no example")
			}
		})
		for _, rate := range []string{"100 kHz", "1 MHz"} {
			if strings.HasSuffix(e.Name, "at "+rate) {
				seen[rate] = true
			}
		}
	}
	if !seen["100 kHz"] || !seen["1 MHz"] {
		t.Errorf("examples at %v; there must be one at 100 kHz and one at 1 MHz", seen)
	}
}
