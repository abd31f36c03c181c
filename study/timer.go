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
// n = reload + 1 with base = clock/postscale, or n = reload with base = clock/(2·postscale). All of this is exact: p·n is a whole number
// of 64 bits, every comparison is one of rationals. Of settings with one rate that with the least prescaler is given: its count is the
// greatest, which is the finest resolution for whatever else the timer does.
type timerRates struct {
	base         *big.Rat // Hz
	mostP, mostN uint64   // p and n run from 1 to these
	center       bool
	scan, walk   uint64 // see nearest
}

// timerChoice is one setting.
type timerChoice struct {
	t    *timerRates
	p, n uint64
}

func ratesOf(t *loop.Timer) *timerRates {
	r := &timerRates{mostP: 1 << t.PrescalerBits, mostN: 1 << t.ReloadBits, scan: mostScanned, walk: mostWalked}
	divisor := int64(t.Postscale)
	if t.Counting == loop.CountCenter {
		r.center, divisor = true, 2*divisor
		r.mostN--
	}
	r.base = new(big.Rat).Quo(t.Clock, big.NewRat(divisor, 1))
	return r
}

// most is the greatest product p·n. Two registers of 32 bits make 2⁶⁴, which does not fit: that one is never given. It
// stands for a rate below 1e12 Hz/2⁶⁴ = 5e-8 Hz, and no loop is slower than 1e-6 Hz.
func (r *timerRates) most() uint64 {
	if hi, lo := bits.Mul64(r.mostP, r.mostN); hi == 0 {
		return lo
	}
	return math.MaxUint64
}

// choice is the setting that makes a product.
func (r *timerRates) choice(x product) timerChoice { return timerChoice{r, x.p, x.x / x.p} }

// rate is exact, Hz.
func (c timerChoice) rate() *big.Rat {
	return new(big.Rat).Quo(c.t.base, ratOf(c.p*c.n))
}

// period is exact, seconds.
func (c timerChoice) period() *big.Rat {
	return new(big.Rat).Quo(ratOf(c.p*c.n), c.t.base)
}

// setting is the choice as register values, its error against a wanted rate above zero.
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

// timerSetting is the setting whose rate is nearest to wanted, by the ratio of the two, within [low, high] (nil: open); of equally near
// ones that with the least prescaler. ok is false when the timer makes no rate there. Rates in Hz; wanted and high are above zero.
func timerSetting(t *loop.Timer, wanted, low, high *big.Rat) (setting timerChoice, ok bool) {
	r := ratesOf(t)
	least, most, ok := r.products(low, high)
	if !ok {
		return timerChoice{}, false
	}
	q := new(big.Rat).Quo(r.base, wanted) // the product wanted
	at, _ := floorOf(q)
	fast := r.nearest(min(at, most), least, true, 1)
	slow := r.nearest(max(at, at+1, least), most, false, 1) // at + 1 is 0 for the greatest at, where both ways find the same
	switch {
	case len(fast)+len(slow) == 0:
		return timerChoice{}, false
	case len(slow) == 0:
		return r.choice(fast[0]), true
	case len(fast) == 0:
		return r.choice(slow[0]), true
	}
	return r.choice(nearer(q, fast[0], slow[0])), true
}

// nearer is the one of two products x <= q <= y whose ratio to q is nearer to 1: x where q/x < y/q. Equally near ones go by the prescaler.
func nearer(q *big.Rat, x, y product) product {
	side := new(big.Rat).Mul(q, q)
	switch side.Cmp(new(big.Rat).Mul(ratOf(x.x), ratOf(y.x))) {
	case -1:
		return x
	case 1:
		return y
	}
	if x.p <= y.p {
		return x
	}
	return y
}

// products is the range of p·n whose rates lie within [low, high], nil being open; false when there are none.
func (r *timerRates) products(low, high *big.Rat) (least, most uint64, ok bool) {
	least, most = 1, r.most()
	if high != nil {
		q := new(big.Rat).Quo(r.base, high)
		if least, ok = floorOf(q); !ok {
			return 0, 0, false
		}
		if ratOf(least).Cmp(q) < 0 {
			if least == math.MaxUint64 {
				return 0, 0, false
			}
			least++
		}
	}
	if low != nil && low.Sign() > 0 {
		x, _ := floorOf(new(big.Rat).Quo(r.base, low))
		most = min(most, x)
	}
	return least, most, least <= most
}

// timerNear lists the settings of the next distinct rates beside a rate, given by its period in seconds above zero: up to n on each side, from
// slow to fast. The rate itself is not among them.
func timerNear(t *loop.Timer, period *big.Rat, n int) []timerChoice {
	r := ratesOf(t)
	q := new(big.Rat).Mul(r.base, period)
	at, ok := floorOf(q)
	var out []timerChoice
	if ok && at < math.MaxUint64 {
		for _, x := range r.nearest(at+1, r.most(), false, n) {
			out = append(out, r.choice(x))
		}
	}
	slices.Reverse(out)
	if ok && ratOf(at).Cmp(q) == 0 {
		at-- // not the rate itself; q is above zero, and so was at
	}
	for _, x := range r.nearest(at, 1, true, n) {
		out = append(out, r.choice(x))
	}
	return out
}

// timerList lists distinct rates that the timer makes within [low, high], Hz, ascending, at most n: all where there are no more, else those
// nearest to n rates spaced evenly in logarithm, each once.
func timerList(t *loop.Timer, low, high float64, n int) []float64 {
	if !(low > 0 && high >= low) || math.IsInf(high, 1) || n < 1 {
		return nil
	}
	r := ratesOf(t)
	lo, hi := new(big.Rat).SetFloat64(low), new(big.Rat).SetFloat64(high)
	least, most, ok := r.products(lo, hi)
	if !ok {
		return nil
	}
	var out []float64
	if all := r.nearest(least, most, false, n+1); len(all) <= n {
		for _, x := range all {
			out = append(out, hertz(r.choice(x).rate()))
		}
	} else {
		for i := range n {
			at := 0.5
			if n > 1 {
				at = float64(i) / float64(n-1)
			}
			f := low * math.Pow(high/low, at)
			if c, ok := timerSetting(t, new(big.Rat).SetFloat64(f), lo, hi); ok {
				out = append(out, hertz(c.rate()))
			}
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// floorOf is the greatest whole number not above x >= 0; the greatest of 64 bits, and false, where it does not fit.
func floorOf(x *big.Rat) (uint64, bool) {
	f := new(big.Int).Quo(x.Num(), x.Denom())
	if !f.IsUint64() {
		return math.MaxUint64, false
	}
	return f.Uint64(), true
}

func ratOf(x uint64) *big.Rat { return new(big.Rat).SetInt(new(big.Int).SetUint64(x)) }
