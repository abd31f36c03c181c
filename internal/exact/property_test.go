package exact_test

import (
	"math/big"
	"testing"

	"pgregory.net/rapid"

	"steadytick/internal/exact"
)

// genRat draws a rational with small numerator and denominator.
func genRat(t *rapid.T, name string) *big.Rat {
	return big.NewRat(rapid.Int64Range(-50, 50).Draw(t, name), rapid.Int64Range(1, 20).Draw(t, name+"/"))
}

// genPoly draws a non-zero polynomial whose roots repeat and collide often.
func genPoly(t *rapid.T, name string) exact.Poly {
	p := exact.IntPoly(rapid.Int64Range(1, 5).Draw(t, name+" gain"))
	for range rapid.IntRange(0, 3).Draw(t, name+" factors") {
		switch rapid.IntRange(0, 3).Draw(t, name+" kind") {
		case 0:
			p = p.Mul(exact.IntPoly(0, 1))
		case 1:
			p = p.Mul(exact.IntPoly(rapid.Int64Range(-3, 3).Draw(t, name+" root"), 1))
		case 2:
			p = p.Mul(exact.IntPoly(rapid.Int64Range(1, 4).Draw(t, name+" w"), rapid.Int64Range(-2, 2).Draw(t, name+" d"), 1))
		default:
			p = p.Mul(exact.NewPoly(genRat(t, name+" c"), genRat(t, name+" c"), big.NewRat(1, 1)))
		}
	}
	return p
}

func genRatio(t *rapid.T, name string) exact.Ratio {
	r, err := exact.FromPolys(genPoly(t, name+" num"), genPoly(t, name+" den"))
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// same tells whether two functions are equal as functions.
func same(a, b exact.Ratio) bool {
	return a.NumPoly().Mul(b.DenPoly()).Equal(b.NumPoly().Mul(a.DenPoly()))
}

// valid checks the promises of Ratio's doc comment.
func valid(t *rapid.T, r exact.Ratio) {
	for _, list := range [][]exact.Factor{r.Num, r.Den} {
		for i, f := range list {
			if f.N < 1 || f.P.Degree() < 1 || f.P.Eval(new(big.Rat)).Cmp(big.NewRat(1, 1)) != 0 {
				t.Fatalf("factor not normalized: %v in %v", f, r)
			}
			for _, g := range list[:i] {
				if g.P.Equal(f.P) {
					t.Fatalf("equal factors not merged in %v", r)
				}
			}
		}
	}
	if r.OriginZeros < 0 || r.OriginPoles < 0 {
		t.Fatalf("negative count at the origin in %v", r)
	}
}

func TestRingLaws(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b, c := genRatio(t, "a"), genRatio(t, "b"), genRatio(t, "c")
		for _, r := range []exact.Ratio{a.Add(b), a.Mul(b), a.Sub(b)} {
			valid(t, r)
		}
		if !same(a.Add(b), b.Add(a)) || !same(a.Add(b).Add(c), a.Add(b.Add(c))) {
			t.Fatal("addition")
		}
		if !same(a.Mul(b.Add(c)), a.Mul(b).Add(a.Mul(c))) {
			t.Fatal("distribution")
		}
		if !a.Sub(a).IsZero() || !same(a.Add(b).Sub(b), a) {
			t.Fatal("subtraction")
		}
		q, err := a.Mul(b).Div(b)
		if err != nil || !same(q, a) {
			t.Fatal("division")
		}
		// The value at a point, against the expanded polynomials.
		x := genRat(t, "x")
		s := a.Add(b)
		if den := s.DenPoly().Eval(x); den.Sign() != 0 {
			got, ok := s.Eval(x)
			if want := den.Quo(s.NumPoly().Eval(x), den); !ok || got.Cmp(want) != 0 {
				t.Fatal("evaluation")
			}
		}
	})
}

// The denominator of a sum is the least common multiple: the product divided by the gcd.
func TestSumDenominatorIsLeast(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := genRatio(t, "a"), genRatio(t, "b")
		s := a.Add(b)
		if s.IsZero() {
			return
		}
		want, rem := a.DenPoly().Mul(b.DenPoly()).DivMod(a.DenPoly().GCD(b.DenPoly()))
		if !rem.IsZero() || want.Degree() != s.Order() {
			t.Fatalf("order %d, want %d", s.Order(), want.Degree())
		}
		if _, rem := want.DivMod(s.DenPoly()); !rem.IsZero() {
			t.Fatal("another denominator")
		}
	})
}

func TestHiddenIsTheGCD(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := genRatio(t, "a").Mul(genRatio(t, "b"))
		valid(t, r)
		num, den, h := r.NumPoly(), r.DenPoly(), r.Hidden()
		n, rem1 := num.DivMod(h)
		d, rem2 := den.DivMod(h)
		if !rem1.IsZero() || !rem2.IsZero() {
			t.Fatalf("%v does not divide", h)
		}
		if g := n.GCD(d); g.Degree() != 0 {
			t.Fatalf("%v left in common", g)
		}
		red := r.Reduced()
		valid(t, red)
		if !same(r, red) || red.Order() != d.Degree() || red.Hidden().Degree() != 0 {
			t.Fatal("Reduced")
		}
	})
}

func TestMoebiusInverse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := genRatio(t, "r")
		a, b, c, d := genRat(t, "a"), genRat(t, "b"), genRat(t, "c"), genRat(t, "d")
		w, err := r.Moebius(a, b, c, d)
		if new(big.Rat).Mul(a, d).Cmp(new(big.Rat).Mul(b, c)) == 0 {
			if err == nil {
				t.Fatal("singular map accepted")
			}
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		valid(t, w)
		neg := func(x *big.Rat) *big.Rat { return new(big.Rat).Neg(x) }
		back, err := w.Moebius(d, neg(b), neg(c), a)
		if err != nil {
			t.Fatal(err)
		}
		valid(t, back)
		if !same(back, r) {
			t.Fatalf("%v came back as %v", r, back)
		}
	})
}

func TestLaurentOfProductsAndSums(t *testing.T) {
	const n = 6
	rapid.Check(t, func(t *rapid.T) {
		a, b := genRatio(t, "a"), genRatio(t, "b")
		sa, ca := a.Laurent(n)
		sb, cb := b.Laurent(n)
		sp, cp := a.Mul(b).Laurent(n)
		if sp != sa+sb || cp[0].Sign() == 0 {
			t.Fatal("start of the product")
		}
		for k := range cp {
			sum := new(big.Rat)
			for j := 0; j <= k; j++ {
				sum.Add(sum, new(big.Rat).Mul(ca[j], cb[k-j]))
			}
			if sum.Cmp(cp[k]) != 0 {
				t.Fatal("product")
			}
		}
		s := a.Add(b)
		ss, cs := s.Laurent(n)
		// Terms both inputs know: powers below min(sa, sb) + n.
		for p := min(sa, sb); p < min(sa, sb)+n; p++ {
			want := new(big.Rat).Add(term(sa, ca, p), term(sb, cb, p))
			if !s.IsZero() && p < ss+n && term(ss, cs, p).Cmp(want) != 0 {
				t.Fatal("sum")
			}
		}
	})
}

func term(start int, c []*big.Rat, p int) *big.Rat {
	if k := p - start; k >= 0 && k < len(c) {
		return c[k]
	}
	return new(big.Rat)
}

// The roots must multiply back: the polynomial of the poles, in exact
// arithmetic on the rounded values, is near the denominator.
func TestPolesMultiplyBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := genRatio(t, "a").Mul(genRatio(t, "b"))
		x, err := r.Poles()
		if err != nil {
			t.Fatal(err)
		}
		if len(x)+r.OriginPoles != r.Order() {
			t.Fatalf("%d poles of %d", len(x)+r.OriginPoles, r.Order())
		}
		p, size := exact.IntPoly(1), exact.IntPoly(1)
		for i := 0; i < len(x); i++ {
			// Roots r̂ = r(1+e), |e| <= 2^−106 a part: each factor's coefficients move by at most 3·2^−106 relative to
			// those of (|x| + |r|), so the product moves by at most 3·12·2^−106 of ΠΠ(|x|+|r|), below 5e-31.
			re, im := x[i].Re.Rat(), x[i].Im.Rat()
			one := big.NewRat(1, 1)
			if im.Sign() == 0 {
				p = p.Mul(exact.NewPoly(new(big.Rat).Neg(re), one))
				size = size.Mul(exact.NewPoly(new(big.Rat).Abs(re), one))
				continue
			}
			if i+1 >= len(x) || x[i+1] != x[i].Conj() {
				t.Fatalf("no exact conjugate after %v", x[i])
			}
			i++
			sq := new(big.Rat).Add(new(big.Rat).Mul(re, re), new(big.Rat).Mul(im, im))
			p = p.Mul(exact.NewPoly(sq, new(big.Rat).Mul(big.NewRat(-2, 1), re), one))
			size = size.Mul(exact.NewPoly(sq, new(big.Rat).Mul(big.NewRat(2, 1), new(big.Rat).Add(new(big.Rat).Abs(re), new(big.Rat).Abs(im))), one))
		}
		_, _, den := r.DenPoly().Origin()
		den = den.Scale(new(big.Rat).Inv(den.Lead()))
		diff := p.Sub(den)
		for k, d := range diff {
			q := new(big.Rat).Quo(d, size[k])
			if f, _ := q.Abs(q).Float64(); !(f <= 5e-31) {
				t.Fatalf("coefficient %d off by %g", k, f)
			}
		}
	})
}

// GCD against what was put in.
func TestGCD(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b, c := genPoly(t, "a"), genPoly(t, "b"), genPoly(t, "c")
		g := a.Mul(c).GCD(b.Mul(c))
		if _, rem := g.DivMod(c); !rem.IsZero() {
			t.Fatal("the common factor does not divide the gcd")
		}
		u, rem1 := a.Mul(c).DivMod(g)
		v, rem2 := b.Mul(c).DivMod(g)
		if !rem1.IsZero() || !rem2.IsZero() || u.GCD(v).Degree() != 0 {
			t.Fatal("not the greatest common divisor")
		}
	})
}
