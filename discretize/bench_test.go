package discretize

import (
	"math/big"
	"testing"

	"steadytick/internal/yardstick"
	"steadytick/sdomain"
)

// order6 is an invented plant of order 6 with an integrator, a double pole, a
// lightly damped pair and one zero.
func order6(b testing.TB) sdomain.Model {
	s := func(num, den []int64) sdomain.Model { return model(b, num, den) }
	m := s([]int64{500, 3}, []int64{0, 1})
	for _, f := range []sdomain.Model{
		s([]int64{1}, []int64{10, 1}), s([]int64{1}, []int64{10, 1}),
		s([]int64{90000}, []int64{90000, 6, 1}), s([]int64{1}, []int64{1, 1}),
	} {
		var err error
		if m, err = m.Mul(f); err != nil {
			b.Fatal(err)
		}
	}
	return m
}

func benchHold(b *testing.B, T, delay *big.Rat) {
	m := order6(b)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Hold(m, T, delay); err != nil {
			b.Fatal(err)
		}
	}
	yardstick.Report(b)
}

// One hold equivalent of order 6 from the exact model, root finding included.
func BenchmarkHold(b *testing.B)        { benchHold(b, big.NewRat(1, 1000), new(big.Rat)) }
func BenchmarkHoldSubTick(b *testing.B) { benchHold(b, big.NewRat(1, 1000), big.NewRat(1, 3000)) }
func BenchmarkHoldSlow(b *testing.B)    { benchHold(b, big.NewRat(1, 50), big.NewRat(1, 3000)) }

// The same for a plant prepared once, as when rates are scanned.
func BenchmarkPreparedHoldSubTick(b *testing.B) {
	p, err := Prepare(order6(b))
	if err != nil {
		b.Fatal(err)
	}
	T, delay := big.NewRat(1, 1000), big.NewRat(1, 3000)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := p.Hold(T, delay); err != nil {
			b.Fatal(err)
		}
	}
	yardstick.Report(b)
}

func BenchmarkTustin(b *testing.B) {
	m, T := order6(b), big.NewRat(1, 1000)
	for b.Loop() {
		if _, err := Map(m, Spec{Method: "tustin"}, T); err != nil {
			b.Fatal(err)
		}
	}
}
