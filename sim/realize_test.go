package sim

import (
	"errors"
	"math"
	"math/big"
	"math/cmplx"
	"testing"

	"pgregory.net/rapid"
	"steadytick/internal/dd"
	"steadytick/sdomain"
)

// response is D + C·(xI − A)⁻¹·B in complex128, block by block: A is lower triangular but for
// the blocks of two.
func (m *chain) response(x complex128) complex128 {
	n := m.n
	v := make([]complex128, n)
	driven := func(i, upTo int) complex128 {
		sum := complex(m.b[i], 0)
		for j := range upTo {
			sum += complex(m.a[i*n+j], 0) * v[j]
		}
		return sum
	}
	for i := 0; i < n; i++ {
		d := x - complex(m.a[i*n+i], 0)
		if i+1 == n || m.a[i*n+i+1] == 0 {
			v[i] = driven(i, i) / d
			continue
		}
		up, down := complex(m.a[i*n+i+1], 0), complex(m.a[(i+1)*n+i], 0)
		p, q := driven(i, i), driven(i+1, i)
		e := x - complex(m.a[(i+1)*n+i+1], 0)
		det := d*e - up*down
		v[i], v[i+1] = (e*p+up*q)/det, (d*q+down*p)/det
		i++
	}
	sum := complex(m.d, 0)
	for i, c := range m.c {
		sum += complex(c, 0) * v[i]
	}
	return sum
}

// The cascade has the frequency response of the product of its factors, with poles and zeros
// over eight decades.
func TestCascadeResponse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		decade := func(name string) float64 { return math.Pow(10, rapid.Float64Range(-3, 5).Draw(t, name)) }
		exact := func(v float64) *big.Rat { return new(big.Rat).SetFloat64(v) }
		var zeros, poles [][2]*big.Rat
		var zc, pc []complex128
		add := func(list *[][2]*big.Rat, c *[]complex128, pair bool, name string) {
			w := decade(name)
			if !pair {
				*list = append(*list, [2]*big.Rat{exact(-w), new(big.Rat)})
				*c = append(*c, complex(-w, 0))
				return
			}
			re, im := -w*rapid.Float64Range(0.01, 0.9).Draw(t, "damping"), w
			*list = append(*list, [2]*big.Rat{exact(re), exact(im)}, [2]*big.Rat{exact(re), exact(-im)})
			*c = append(*c, complex(re, im), complex(re, -im))
		}
		for range rapid.IntRange(0, 3).Draw(t, "pole pairs") {
			add(&poles, &pc, true, "pole")
		}
		for range rapid.IntRange(0, 4).Draw(t, "real poles") {
			add(&poles, &pc, false, "pole")
		}
		for range rapid.IntRange(0, 2).Draw(t, "integrators") {
			poles = append(poles, [2]*big.Rat{new(big.Rat), new(big.Rat)})
			pc = append(pc, 0)
		}
		for len(zeros)+2 <= len(poles) && rapid.Bool().Draw(t, "more zeros") {
			add(&zeros, &zc, true, "zero")
		}
		for len(zeros) < len(poles) && rapid.Bool().Draw(t, "one more") {
			add(&zeros, &zc, false, "zero")
		}
		m, err := sdomain.FromZerosPoles(zeros, poles, big.NewRat(3, 1))
		if err != nil {
			t.Fatal(err)
		}
		c, err := realizeModel(m)
		if err != nil {
			t.Fatal(err)
		}
		z, err := m.Ratio.Zeros()
		if err != nil {
			t.Fatal(err)
		}
		p, err := m.Ratio.Poles()
		if err != nil {
			t.Fatal(err)
		}
		list := sections(append(p, make([]dd.Complex, m.Ratio.OriginPoles)...), z)
		for _, w := range []float64{1e-4, 0.03, 1, 40, 3e3, 1e6} {
			s := complex(0, w)
			want := complex(3, 0)
			for i, p := range pc {
				f := 1 / (s - p)
				if i < len(zc) {
					f *= s - zc[i]
				}
				want *= f
			}
			// A section near one of its zeros, or far below its poles, takes a small difference of its
			// direct path and its states: it loses as many digits as the ratio has.
			loss := 1.0
			for _, x := range list {
				for _, z := range x.zeros {
					loss *= math.Max(1, math.Max(x.size(), w)/cmplx.Abs(s-z.Complex128()))
				}
			}
			tol := 1e-14 * loss * cmplx.Abs(want) // a few roundings for each of up to 10 sections
			if got := c.response(s); !(cmplx.Abs(got-want) <= tol) {
				t.Fatalf("at %g rad/s %v, want %v (off %.2g of it), zeros %v poles %v", w, got, want, cmplx.Abs(got-want)/cmplx.Abs(want), zc, pc)
			}
		}
	})
}

func TestRealizeErrors(t *testing.T) {
	if _, err := realizeModel(model(t, rats("1", "0", "0"), rats("1", "1"), "0")); !errors.Is(err, ErrImproper) {
		t.Errorf("improper: %v", err)
	}
	zero, err := realizeModel(model(t, rats("0"), rats("1", "1"), "0"))
	if err != nil || zero.n != 0 || zero.d != 0 {
		t.Errorf("zero: %+v, %v", zero, err)
	}
}

// Partial fractions at the origin: s²+3s+2 over s²(s+4) is 0.5/s² + 0.625/s + 0.375/(s+4)
// (by hand: 2/4; (3 − 0.5)/4; (16−12+2)/16).
func TestSplitIntegrators(t *testing.T) {
	tf, err := model(t, rats("1", "3", "2"), rats("1", "4", "0", "0"), "0").TF()
	if err != nil {
		t.Fatal(err)
	}
	rho, rest := splitIntegrators(tf)
	if len(rho) != 2 || rho[0] != 0.625 || rho[1] != 0.5 {
		t.Errorf("integrators %v, want [0.625 0.5]", rho)
	}
	if len(rest.Num) != 1 || rest.Num[0].Float64() != 0.375 || rest.OriginPoles != 0 || len(rest.Poles) != 1 {
		t.Errorf("rest %+v", rest)
	}
}

// Triple zeros keep their digits: ((s+3)² + 16)³ over (s+1)(s+2)…(s+6) at ω = 1, by the factors.
func TestMultipleZeros(t *testing.T) {
	num, den := rats("1"), rats("1")
	times := func(a, b []*big.Rat) []*big.Rat {
		out := make([]*big.Rat, len(a)+len(b)-1)
		for i := range out {
			out[i] = new(big.Rat)
		}
		for i := range a {
			for j := range b {
				out[i+j].Add(out[i+j], new(big.Rat).Mul(a[i], b[j]))
			}
		}
		return out
	}
	want := complex(1, 0)
	for range 3 {
		num = times(num, rats("1", "6", "25"))
		want *= complex(24, 6) // (j)² + 6j + 25
	}
	for k := 1; k <= 6; k++ {
		den = times(den, []*big.Rat{big.NewRat(1, 1), big.NewRat(int64(k), 1)})
		want /= complex(float64(k), 1)
	}
	c, err := realizeModel(model(t, num, den, "0"))
	if err != nil {
		t.Fatal(err)
	}
	if got := c.response(1i); !(cmplx.Abs(got-want) <= 1e-13*cmplx.Abs(want)) { // ratios up to 25 in three sections
		t.Errorf("%v, want %v", got, want)
	}
}
