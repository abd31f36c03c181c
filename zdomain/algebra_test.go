package zdomain

import (
	"errors"
	"math/big"
	"testing"

	"steadytick/internal/exact"
)

// sample returns gain·(x + a)/x^poles at T = 1/4, x = δ.
func sample(t *testing.T, gain, a int64, poles int) Model {
	t.Helper()
	x := exact.X()
	r := x.Add(exact.Const(big.NewRat(a, 1))).Mul(exact.Const(big.NewRat(gain, 1)))
	for range poles {
		var err error
		if r, err = r.Div(x); err != nil {
			t.Fatal(err)
		}
	}
	m, err := FromDelta(r, big.NewRat(1, 4))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// value evaluates the exact form at δ = 3/7.
func value(t *testing.T, m Model) *big.Rat {
	t.Helper()
	v, ok := m.Exact.Eval(big.NewRat(3, 7))
	if !ok {
		t.Fatal("a pole at 3/7")
	}
	return v
}

// The reference is arithmetic over the rationals at one point.
func TestAlgebraAgreesAtAPoint(t *testing.T) {
	a, b := sample(t, 2, 3, 1), sample(t, -5, 1, 2)
	sum, err := a.Add(b)
	if err != nil {
		t.Fatal(err)
	}
	if want := new(big.Rat).Add(value(t, a), value(t, b)); value(t, sum).Cmp(want) != 0 {
		t.Errorf("sum %v, want %v", value(t, sum), want)
	}
	if sum.TF.OriginPoles != 2 {
		t.Errorf("the sum has %d integrators, want 2: the common one counts once", sum.TF.OriginPoles)
	}
	product, err := a.Mul(b)
	if err != nil {
		t.Fatal(err)
	}
	if want := new(big.Rat).Mul(value(t, a), value(t, b)); value(t, product).Cmp(want) != 0 {
		t.Errorf("product %v, want %v", value(t, product), want)
	}
	if product.TF.OriginPoles != 3 {
		t.Errorf("the product has %d integrators, want 3", product.TF.OriginPoles)
	}
	scaled, err := a.Scale(big.NewRat(-7, 2))
	if err != nil {
		t.Fatal(err)
	}
	if want := new(big.Rat).Mul(value(t, a), big.NewRat(-7, 2)); value(t, scaled).Cmp(want) != 0 {
		t.Errorf("scaled %v, want %v", value(t, scaled), want)
	}
}

func TestTicksAddAndMustAgreeInSums(t *testing.T) {
	a, b := sample(t, 2, 3, 1), sample(t, -5, 1, 2)
	a.TF.Ticks, b.TF.Ticks = 2, 5
	product, err := a.Mul(b)
	if err != nil || product.TF.Ticks != 7 {
		t.Errorf("ticks %d, %v; want 7", product.TF.Ticks, err)
	}
	if _, err := a.Add(b); err == nil {
		t.Error("a sum of different delays was not refused")
	}
	b.Period = big.NewRat(1, 2)
	if _, err := a.Mul(b); !errors.Is(err, ErrPeriods) {
		t.Errorf("error %v, want ErrPeriods", err)
	}
}
