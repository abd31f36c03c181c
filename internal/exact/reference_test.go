package exact_test

import (
	"encoding/json"
	"math/big"
	"os"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
)

// reference is testdata/reference.json, written by testdata/generate.py with
// Python's fractions and mpmath.
type reference struct {
	Roots []struct {
		Name  string
		P     []string
		Power int
		Roots [][2]string
	}
	Ratios []struct {
		Num, Den, Num2, Den2                []string
		Start                               int
		Series, Map                         []string
		X, Sum, Difference, Product, Mapped string
	}
}

func readReference(t *testing.T) reference {
	t.Helper()
	text, err := os.ReadFile("testdata/reference.json")
	if err != nil {
		t.Fatal(err)
	}
	var ref reference
	if err := json.Unmarshal(text, &ref); err != nil {
		t.Fatal(err)
	}
	if len(ref.Roots) < 10 || len(ref.Ratios) < 20 {
		t.Fatalf("reference has only %d and %d cases", len(ref.Roots), len(ref.Ratios))
	}
	return ref
}

func rat(s string) *big.Rat {
	x, ok := new(big.Rat).SetString(s)
	if !ok {
		panic("not a number: " + s)
	}
	return x
}

func polyOf(s []string) exact.Poly {
	c := make([]*big.Rat, len(s))
	for i := range s {
		c[i] = rat(s[i])
	}
	return exact.NewPoly(c...)
}

func mustRatio(t testing.TB, num, den exact.Poly) exact.Ratio {
	t.Helper()
	r, err := exact.FromPolys(num, den)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// partTolerance is 2^−105 relative to the part itself: 106 bits rounded to nearest
// is 2^−106, and the reference printed with 45 digits adds 1e-45.
const partTolerance = 2.5e-32

func samePart(got dd.Float, want *big.Rat) bool {
	if want.Sign() == 0 {
		return got.Sign() == 0
	}
	diff := new(big.Rat).Sub(got.Rat(), want)
	rel, _ := diff.Quo(diff, want).Float64()
	return rel <= partTolerance && rel >= -partTolerance
}

func TestRootsAgainstMpmath(t *testing.T) {
	for _, c := range readReference(t).Roots {
		t.Run(c.Name, func(t *testing.T) {
			p := polyOf(c.P)
			r := mustRatio(t, exact.IntPoly(1), p.Pow(c.Power))
			got, err := r.Poles()
			if err != nil {
				t.Fatal(err)
			}
			if len(got) != c.Power*len(c.Roots) {
				t.Fatalf("%d roots, want %d", len(got), c.Power*len(c.Roots))
			}
			for _, w := range c.Roots {
				re, im, n := rat(w[0]), rat(w[1]), 0
				for _, z := range got {
					if samePart(z.Re, re) && samePart(z.Im, im) {
						n++
					}
				}
				if n != c.Power {
					t.Errorf("root %s %s found %d times, want %d, in %v", w[0], w[1], n, c.Power, got)
				}
			}
		})
	}
}

func TestSeriesAgainstLongDivision(t *testing.T) {
	for i, c := range readReference(t).Ratios {
		r := mustRatio(t, polyOf(c.Num), polyOf(c.Den))
		start, s := r.Laurent(len(c.Series))
		if start != c.Start {
			t.Errorf("case %d: start %d, want %d", i, start, c.Start)
		}
		for k, w := range c.Series {
			if s[k].Cmp(rat(w)) != 0 {
				t.Errorf("case %d: term %d is %s, want %s", i, k, s[k].RatString(), w)
			}
		}
	}
}

func TestAlgebraAgainstFractions(t *testing.T) {
	for i, c := range readReference(t).Ratios {
		g := mustRatio(t, polyOf(c.Num), polyOf(c.Den))
		h := mustRatio(t, polyOf(c.Num2), polyOf(c.Den2))
		m := polyOf(append(c.Map, "1")) // the 1 keeps a zero d from being trimmed
		w, err := g.Moebius(m[0], m[1], m[2], m[3])
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range []struct {
			name string
			r    exact.Ratio
			want string
		}{
			{"sum", g.Add(h), c.Sum}, {"difference", g.Sub(h), c.Difference},
			{"product", g.Mul(h), c.Product}, {"substitution", w, c.Mapped},
		} {
			got, ok := v.r.Eval(rat(c.X))
			if !ok || got.Cmp(rat(v.want)) != 0 {
				t.Errorf("case %d: %s is %v, want %s", i, v.name, got, v.want)
			}
		}
	}
}
