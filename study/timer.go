package study

import (
	"math"
	"math/big"
	"math/bits"
	"slices"

	"steadytick/loop"
)

// A timer divides its clock by whole numbers. With p = prescaler + 1 its rates are
//
//	up:      clock/(p·(reload + 1)·postscale)
//	center:  clock/(2·p·reload·postscale),   reload >= 1
//
// (counting as in the reference manuals of common microcontrollers; from memory). Both are base/(p·n) with one count n a period:
// n = reload + 1 with base = clock/postscale, or n = reload with base = clock/(2·postscale). All of this is exact.
type timerRates struct {
	base         *big.Rat // Hz
	mostP, mostN uint64   // p and n run from 1 to these
	center       bool
}

// timerChoice is one setting.
type timerChoice struct {
	t    *timerRates
	p, n uint64
}

func ratesOf(t *loop.Timer) *timerRates {
	r := &timerRates{base: new(big.Rat).Quo(t.Clock, big.NewRat(int64(t.Postscale), 1)), mostP: 1 << t.PrescalerBits, mostN: 1 << t.ReloadBits}
	if t.Counting == loop.CountCenter {
		r.center, r.base, r.mostN = true, r.base.Quo(r.base, big.NewRat(2, 1)), r.mostN-1
	}
	return r
}

// product is p·n.
func (c timerChoice) product() *big.Int {
	return new(big.Int).Mul(new(big.Int).SetUint64(c.p), new(big.Int).SetUint64(c.n))
}

// rate is exact, Hz.
func (c timerChoice) rate() *big.Rat {
	return new(big.Rat).Quo(c.t.base, new(big.Rat).SetInt(c.product()))
}

// period is exact, seconds.
func (c timerChoice) period() *big.Rat { return new(big.Rat).Inv(c.rate()) }

// setting is the choice as register values, its error against a wanted rate.
func (c timerChoice) setting(wanted *big.Rat) TimerSetting {
	reload := c.n
	if !c.t.center {
		reload--
	}
	f := c.rate()
	e := new(big.Rat).Quo(f, wanted)
	e.Sub(e, big.NewRat(1, 1)).Mul(e, big.NewRat(1_000_000, 1))
	return TimerSetting{Prescaler: int64(c.p - 1), Reload: int64(reload), RateHz: hertz(f), WantedHz: hertz(wanted), ErrorPPM: hertz(e)}
}

// mostPrescalers bounds the prescalers tried for one rate. With a reload register of 16 bits or more and no more than 16 of prescaler every
// one is tried; beyond that the smallest that can serve are, which have the finest steps of reload.
const mostPrescalers = 1 << 16

// timerSetting is the setting whose rate is nearest to wanted, by ratio, within [low, high] (nil: open), of equal ones that with the least prescaler:
// its count is the largest, which is the finest resolution for whatever else the timer does. ok is false when none lies within. All rates in exact Hz.
func timerSetting(t *loop.Timer, wanted, low, high *big.Rat) (best timerChoice, ok bool) {
	r := ratesOf(t)
	target := wanted
	switch {
	case low != nil && target.Cmp(low) < 0:
		target = low
	case high != nil && target.Cmp(high) > 0:
		target = high
	}
	q := new(big.Rat).Quo(r.base, wanted) // the product wanted
	error := new(big.Rat)
	r.each(new(big.Rat).Quo(r.base, target), func(p uint64) bool {
		for _, n := range r.counts(q, p, low, high) {
			c := timerChoice{r, p, n}
			e := ratioError(new(big.Rat).SetInt(c.product()), q)
			if !ok || e.Cmp(error) < 0 {
				best, error, ok = c, e, true
			}
		}
		return error.Sign() == 0 && ok
	})
	return best, ok
}

// ratioError is |ratio of a and b, the greater over the smaller| − 1.
func ratioError(a, b *big.Rat) *big.Rat {
	if a.Cmp(b) < 0 {
		a, b = b, a
	}
	e := new(big.Rat).Quo(a, b)
	return e.Sub(e, big.NewRat(1, 1))
}

// each calls f with the prescalers that can serve a product of about q, ascending, until f says stop: from the first with which the count fits
// its register to the first with which it is below 1.
func (r *timerRates) each(q *big.Rat, f func(p uint64) (stop bool)) {
	least := new(big.Rat).Quo(q, new(big.Rat).SetInt(new(big.Int).SetUint64(r.mostN)))
	first := clampUint(floorRat(least), 1, r.mostP)
	last := clampUint(new(big.Int).Add(floorRat(q), big.NewInt(1)), 1, r.mostP)
	if last-first >= mostPrescalers {
		last = first + mostPrescalers - 1
	}
	for p := first; p <= last; p++ {
		if f(p) {
			return
		}
	}
}

// counts are the counts with a prescaler p whose rates lie within [low, high] nearest to the product q on both sides.
func (r *timerRates) counts(q *big.Rat, p uint64, low, high *big.Rat) []uint64 {
	from, to := uint64(1), r.mostN
	over := new(big.Rat).Quo(r.base, new(big.Rat).SetInt(new(big.Int).SetUint64(p))) // base/p: the rate at n = 1
	if high != nil {
		least := new(big.Rat).Quo(over, high)
		ceil := floorRat(least)
		if !least.IsInt() {
			ceil.Add(ceil, big.NewInt(1))
		}
		if ceil.Cmp(new(big.Int).SetUint64(to)) > 0 {
			return nil
		}
		from = clampUint(ceil, 1, to)
	}
	if low != nil && low.Sign() > 0 {
		most := floorRat(new(big.Rat).Quo(over, low))
		if most.Cmp(new(big.Int).SetUint64(from)) < 0 {
			return nil
		}
		to = clampUint(most, from, to)
	}
	below := clampUint(floorRat(new(big.Rat).Quo(q, new(big.Rat).SetInt(new(big.Int).SetUint64(p)))), from, to)
	if above := min(below+1, to); above != below {
		return []uint64{below, above}
	}
	return []uint64{below}
}

// floorRat is the greatest whole number not above a positive x.
func floorRat(x *big.Rat) *big.Int { return new(big.Int).Quo(x.Num(), x.Denom()) }

func clampUint(x *big.Int, low, high uint64) uint64 {
	if x.Sign() < 0 || x.Cmp(new(big.Int).SetUint64(low)) < 0 {
		return low
	}
	if x.Cmp(new(big.Int).SetUint64(high)) > 0 {
		return high
	}
	return x.Uint64()
}

// timerNear lists the settings of the next distinct rates beside a rate of the timer, given by its period in seconds, up to n on each side, from
// slow to fast; of equal rates that with the least prescaler. The rate itself is not among them.
func timerNear(t *loop.Timer, period *big.Rat, n int) []timerChoice {
	r := ratesOf(t)
	q := new(big.Rat).Mul(r.base, period)
	var slower, faster []timerChoice
	r.each(q, func(p uint64) bool {
		middle := new(big.Rat).Quo(q, new(big.Rat).SetInt(new(big.Int).SetUint64(p)))
		at := floorRat(middle)
		for k := -int64(n) - 1; k <= int64(n)+1; k++ {
			x := new(big.Int).Add(at, big.NewInt(k))
			if x.Sign() <= 0 || !x.IsUint64() || x.Uint64() > r.mostN {
				continue
			}
			c := timerChoice{r, p, x.Uint64()}
			switch new(big.Rat).SetInt(c.product()).Cmp(q) {
			case 1:
				slower = keepNearest(slower, c, n, func(a, b *big.Int) bool { return a.Cmp(b) < 0 })
			case -1:
				faster = keepNearest(faster, c, n, func(a, b *big.Int) bool { return a.Cmp(b) > 0 })
			}
		}
		return false
	})
	slices.Reverse(slower)
	return append(slower, faster...)
}

// keepNearest puts c into a list of at most n distinct products, nearest first.
func keepNearest(list []timerChoice, c timerChoice, n int, nearer func(a, b *big.Int) bool) []timerChoice {
	x := c.product()
	at := 0
	for ; at < len(list); at++ {
		y := list[at].product()
		if x.Cmp(y) == 0 {
			return list
		}
		if nearer(x, y) {
			break
		}
	}
	if list = slices.Insert(list, at, c); len(list) > n {
		list = list[:n]
	}
	return list
}

// timerList lists distinct rates that the timer makes within [low, high], Hz, ascending, at most about n: all where there are no more, else those nearest
// to rates spaced evenly in logarithm.
func timerList(t *loop.Timer, low, high float64, n int) []float64 {
	lo, hi := new(big.Rat).SetFloat64(low), new(big.Rat).SetFloat64(high)
	if out, ok := allRates(ratesOf(t), lo, hi, n); ok {
		return out
	}
	var out []float64
	for i := range n {
		f := low * math.Pow(high/low, float64(i)/float64(n-1))
		if c, ok := timerSetting(t, new(big.Rat).SetFloat64(f), lo, hi); ok {
			out = append(out, hertz(c.rate()))
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// allRates lists every rate within [lo, hi], false where they are more than n or the products more than can be gone through.
func allRates(r *timerRates, lo, hi *big.Rat, n int) ([]float64, bool) {
	most := floorRat(new(big.Rat).Quo(r.base, lo))
	least := floorRat(new(big.Rat).Quo(r.base, hi))
	if !most.IsUint64() || !least.IsUint64() || most.Uint64()-least.Uint64() > 1<<16 {
		return nil, false
	}
	var out []float64
	for x := most.Uint64(); x >= max(least.Uint64(), 1); x-- {
		if !r.makes(x) {
			continue
		}
		if f := new(big.Rat).Quo(r.base, new(big.Rat).SetInt(new(big.Int).SetUint64(x))); f.Cmp(lo) >= 0 && f.Cmp(hi) <= 0 {
			out = append(out, hertz(f))
		}
		if len(out) > n {
			return nil, false
		}
	}
	return out, true
}

// makes tells whether a product is p·n with both in range.
func (r *timerRates) makes(x uint64) bool {
	if hi, lo := bits.Mul64(r.mostP, r.mostN); hi == 0 && x > lo {
		return false
	}
	for p := max(1, (x-1)/r.mostN+1); p <= r.mostP && p <= x; p++ {
		if x%p == 0 {
			return true
		}
		if p > 1<<20 {
			return false // no timer of this size is drawn rate by rate
		}
	}
	return false
}
