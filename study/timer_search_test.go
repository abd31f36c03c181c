package study

import (
	"fmt"
	"math"
	"math/big"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"steadytick/loop"
)

// Products of great registers, the least prescaler of each: divisors by SymPy 1.x, every whole number from the place on,
//
//	min(d for d in divisors(x) if d <= mostP and x//d <= mostN)
func TestProductsOfGreatRegisters(t *testing.T) {
	for _, c := range []struct {
		p, n     int // bits
		from     uint64
		down, up []product
	}{
		{32, 32, 72_000_021_600_000,
			[]product{{72_000_021_600_000, 18_000}, {72_000_021_599_999, 26_623}, {72_000_021_599_997, 24_303}},
			[]product{{72_000_021_600_000, 18_000}, {72_000_021_600_001, 183_373}, {72_000_021_600_004, 31_379}}},
		{32, 32, 999_999_999_999_999_989,
			[]product{{999_999_999_999_999_984, 249_999_999}, {999_999_999_999_999_983, 320_989_741}, {999_999_999_999_999_978, 361_722_606}},
			[]product{{999_999_999_999_999_991, 318_793_373}, {999_999_999_999_999_992, 299_341_084}, {999_999_999_999_999_995, 369_743_471}}},
		{20, 22, 3_000_000_000_017,
			[]product{{3_000_000_000_014, 775_414}, {3_000_000_000_012, 998_002}, {3_000_000_000_009, 867_481}},
			[]product{{3_000_000_000_020, 783_415}, {3_000_000_000_022, 931_954}, {3_000_000_000_023, 793_777}}},
		{32, 21, 1<<52 - 12_345,
			[]product{{4_503_599_627_358_150, 2_148_100_273}, {4_503_599_627_358_144, 2_857_285_824}, {4_503_599_627_358_143, 4_228_378_687}},
			[]product{{4_503_599_627_358_154, 3_231_483_958}, {4_503_599_627_358_156, 4_184_552_599}, {4_503_599_627_358_158, 2_844_514_051}}},
		{24, 32, 1<<55 + 1,
			[]product{{1 << 55, 8_388_608}, {1<<55 - 1, 8_803_969}, {1<<55 - 2, 9_942_054}},
			[]product{{1<<55 + 2, 9_110_917}, {1<<55 + 8, 14_586_017}, {1<<55 + 10, 10_427_867}}},
	} {
		r := ratesOf(&loop.Timer{Clock: big.NewRat(1, 1), PrescalerBits: c.p, ReloadBits: c.n, Postscale: 1})
		if got := r.nearest(c.from, 1, true, 3); !slices.Equal(got, c.down) {
			t.Errorf("%d × %d bits, down from %d: %v, want %v", c.p, c.n, c.from, got, c.down)
		}
		if got := r.nearest(c.from, math.MaxUint64, false, 3); !slices.Equal(got, c.up) {
			t.Errorf("%d × %d bits, up from %d: %v, want %v", c.p, c.n, c.from, got, c.up)
		}
	}
}

// ways are the ways to search: as the size says, by divisors only, by the registers only, and by what follows when divisors lead nowhere.
var ways = map[string][2]uint64{"as the size says": {mostScanned, mostWalked}, "divisors": {0, 1 << 40}, "registers": {1 << 30, 0}, "given up": {0, 0}}

// Every way gives what brute force gives, between any two ends, in both directions.
func TestNearestProducts(t *testing.T) {
	for _, bits := range [][2]int{{4, 6}, {6, 4}, {0, 5}, {6, 1}, {3, 3}} {
		b := bruteTimer(1, bits[0], bits[1], loop.CountUp, 1)
		last := b.counts[len(b.counts)-1]
		for name, way := range ways {
			r := ratesOf(b.timer)
			r.scan, r.walk = way[0], way[1]
			for from := int64(0); from <= last+2; from += 1 + from/40 {
				for _, k := range []int{0, 1, 2, 5, 40} {
					for _, length := range []int64{0, 1, 10, 2 * last} {
						b.checkNearest(t, name, r, from, max(from-length, 0), true, k)
						b.checkNearest(t, name, r, from, from+length, false, k)
					}
				}
			}
		}
	}
}

func (b *brute) checkNearest(t *testing.T, way string, r *timerRates, from, to int64, down bool, k int) {
	t.Helper()
	var want []product
	for _, x := range b.counts {
		if x >= min(from, to) && x <= max(from, to) {
			want = append(want, product{uint64(x), uint64(b.by[x][0].prescaler + 1)})
		}
	}
	if down {
		slices.Reverse(want)
	}
	want = want[:min(k, len(want))]
	if got := r.nearest(uint64(from), uint64(to), down, k); !slices.Equal(got, want) {
		t.Fatalf("%v, %s: %d from %d to %d: %v, want %v", b, way, k, from, to, got, want)
	}
}

// The ways agree on timers that are too large for brute force.
func TestNearestWaysAgree(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		for range cheap {
			waysAgree(t)
		}
	})
}

func waysAgree(t *rapid.T) {
	r := ratesOf(&loop.Timer{Clock: big.NewRat(1, 1), PrescalerBits: rapid.IntRange(0, 17).Draw(t, "p"), ReloadBits: rapid.IntRange(1, 17).Draw(t, "n"), Postscale: 1})
	from := 1 + uint64(math.Exp(rapid.Float64Range(0, math.Log(float64(r.most()))).Draw(t, "log from")))
	k, down := rapid.IntRange(1, 4).Draw(t, "k"), rapid.Bool().Draw(t, "down")
	to := uint64(math.MaxUint64)
	if down {
		to = 1
	}
	r.scan, r.walk = 1<<30, 0
	want := r.nearest(from, to, down, k)
	r.scan, r.walk = mostScanned, mostWalked
	if got := r.nearest(from, to, down, k); !slices.Equal(got, want) {
		t.Fatalf("from %d: %v, by the registers %v", from, got, want)
	}
	// By divisors alone as far as they lead: near the greatest product gaps are as wide as a register.
	r.scan, r.walk = 0, 200
	if got := r.nearest(from, to, down, k); !slices.Equal(got, want) {
		t.Fatalf("from %d by divisors: %v, by the registers %v", from, got, want)
	}
}

// Factors as published (from memory): 2⁶⁴ − 1 is the product of the first six Fermat numbers, of which the last is 641·6700417 (Euler 1732); 2⁵⁹ − 1
// (Landry 1867); 2⁶¹ − 1 is prime (Pervushin 1883). The others are products of numbers that SymPy says are prime.
func TestPrimeFactors(t *testing.T) {
	for _, want := range [][]uint64{
		{3, 5, 17, 257, 641, 65537, 6700417}, {179951, 3203431780337}, {1<<61 - 1}, {2, 2, 2, 3, 3, 5, 7, 11, 13}, {},
		{4294967291, 4294967291}, {4294967279, 4294967291}, {257, 257}, {257, 257, 257, 257}, {251, 257, 263}, {2642239, 2642239, 2642239},
		{65521, 65521, 65537}, {3, 3, 3, 65537, 65537, 65539}, {4294967279, 4294967279},
	} {
		x := uint64(1)
		for _, p := range want {
			x *= p
		}
		if got := primeFactors(x); !slices.Equal(got, want) && len(want) > 0 || len(want) == 0 && len(got) > 0 {
			t.Errorf("%d: %v, want %v", x, got, want)
		}
	}
	if got := primeFactors(1 << 63); len(got) != 63 {
		t.Errorf("2⁶³: %v", got)
	}
}

// Every divisor once, by trial of every number; and whole factorizations of any number of 64 bits.
func TestDivisors(t *testing.T) {
	for x := uint64(1); x <= 3000; x++ {
		var want []uint64
		for d := uint64(1); d <= x; d++ {
			if x%d == 0 {
				want = append(want, d)
			}
		}
		got := divisors(x)
		if slices.Sort(got); !slices.Equal(got, want) {
			t.Fatalf("%d: %v, want %v", x, got, want)
		}
	}
	// The most divisors below 2⁶⁴: 897612484786617600 = 2⁸·3⁴·5²·7²·11·13·17·19·23·29·31·37 has 103680 (OEIS A002182, from memory).
	if n := len(divisors(897_612_484_786_617_600)); n != 103_680 {
		t.Errorf("%d divisors", n)
	}
	rapid.Check(t, func(t *rapid.T) {
		for range cheap {
			x, product := rapid.Uint64Range(1, math.MaxUint64).Draw(t, "x"), uint64(1)
			for _, p := range primeFactors(x) {
				if !new(big.Int).SetUint64(p).ProbablyPrime(5) {
					t.Fatalf("%d has a factor %d, which is not prime", x, p)
				}
				product *= p
			}
			if product != x {
				t.Fatalf("the factors of %d make %d", x, product)
			}
		}
	})
}

// The greatest registers: nothing overflows, at either end. 2⁶⁴ itself is left out.
func TestGreatestTimer(t *testing.T) {
	timer := &loop.Timer{Clock: big.NewRat(1_000_000_000_000, 1), PrescalerBits: 32, ReloadBits: 32, Postscale: 1}
	for _, wanted := range []*big.Rat{big.NewRat(1, math.MaxInt64), new(big.Rat).Quo(timer.Clock, ratOf(math.MaxUint64)), big.NewRat(1, 18_000_000)} {
		c, ok := timerSetting(timer, wanted, nil, nil)
		if !ok || byRegisters(timer, c.setting(wanted)).Cmp(c.rate()) != 0 {
			t.Errorf("%s Hz: %v %+v", wanted, ok, c.setting(wanted))
		}
		if x := c.setting(wanted); x.Prescaler > math.MaxUint32 || x.Reload > math.MaxUint32 || x.Prescaler < 0 || x.Reload < 0 {
			t.Errorf("%s Hz: %+v", wanted, x)
		}
	}
	if _, ok := timerSetting(timer, big.NewRat(1, math.MaxInt64), nil, big.NewRat(1, math.MaxInt64)); ok {
		t.Error("a rate slower than the slowest")
	}
	beyond := new(big.Rat).Quo(timer.Clock, new(big.Rat).Add(ratOf(math.MaxUint64), big.NewRat(1, 2)))
	if c, ok := timerSetting(timer, beyond, nil, beyond); ok {
		t.Errorf("a rate below the limit by half a count beyond 64 bits: %s", c.rate())
	}
	if _, ok := timerSetting(timer, big.NewRat(1, 1), big.NewRat(1_000_000_000_001, 1), nil); ok {
		t.Error("a rate faster than the clock")
	}
	for _, period := range []*big.Rat{new(big.Rat).Inv(timer.Clock), new(big.Rat).Quo(ratOf(math.MaxUint64), timer.Clock), big.NewRat(math.MaxInt64, 1)} {
		name := fmt.Sprint(period)
		near := timerNear(timer, period, 2)
		for i := range near {
			if i > 0 && near[i].rate().Cmp(near[i-1].rate()) <= 0 || near[i].period().Cmp(period) == 0 {
				t.Errorf("%s: %v", name, near)
			}
		}
		if len(near) != 2 {
			t.Errorf("beside %s s: %d rates, want 2 on one side", name, len(near))
		}
	}
}
