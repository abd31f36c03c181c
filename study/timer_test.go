package study

import (
	"fmt"
	"math"
	"math/big"
	"math/bits"
	"slices"
	"testing"

	"steadytick/loop"
)

// By hand: 72 MHz/1 kHz = 72 000 counts; the least prescaler with which they fit 16 bits is 1 (dividing by 2), reload 35 999.
func TestTimerByHand(t *testing.T) {
	timer := &loop.Timer{Clock: big.NewRat(72_000_000, 1), PrescalerBits: 16, ReloadBits: 16, Postscale: 1}
	khz := big.NewRat(1000, 1)
	c, ok := timerSetting(timer, khz, nil, nil)
	if got, want := c.setting(khz), (TimerSetting{Prescaler: 1, Reload: 35_999, RateHz: 1000, WantedHz: 1000}); !ok || got != want {
		t.Errorf("%+v, want %+v", got, want)
	}
	if c.period().Cmp(big.NewRat(1, 1000)) != 0 {
		t.Errorf("period %s", c.period())
	}
	// 1001 Hz are 71 928.07… counts: 71 928 = 2·35 964, a rate of 1001.001001… Hz, 1/999 ppm too much.
	c, ok = timerSetting(timer, big.NewRat(1001, 1), nil, nil)
	got := c.setting(big.NewRat(1001, 1))
	if want := new(big.Rat).SetFrac64(72_000_000, 71_928); !ok || c.rate().Cmp(want) != 0 || got.Prescaler != 1 || got.Reload != 35_963 {
		t.Errorf("%+v", got)
	}
	if want := (72_000_000.0/71_928/1001 - 1) * 1e6; !(math.Abs(got.ErrorPPM-want) <= 1e6*4*0x1p-52) { // four roundings of figures near 1, in ppm
		t.Errorf("error %g ppm, want %g", got.ErrorPPM, want)
	}
	// 72 001 = 89·809 counts can be made; 71 999 cannot, being prime and beyond 16 bits: 71 998 = 2·35 999 is next.
	near := timerNear(timer, big.NewRat(1, 1000), 1)
	if len(near) != 2 || near[0].rate().Cmp(big.NewRat(72_000_000, 72_001)) != 0 || near[1].rate().Cmp(big.NewRat(72_000_000, 71_998)) != 0 {
		t.Errorf("beside 1 kHz: %v", near)
	}
	// Counting to the center and back, 20 kHz: 72 MHz/(2·20 kHz) = 1800 counts up, and every second period a tick: 900.
	timer.Counting, timer.Postscale = loop.CountCenter, 2
	c, ok = timerSetting(timer, big.NewRat(20_000, 1), nil, nil)
	if got, want := c.setting(big.NewRat(20_000, 1)), (TimerSetting{Prescaler: 0, Reload: 900, RateHz: 20_000, WantedHz: 20_000}); !ok || got != want {
		t.Errorf("%+v, want %+v", got, want)
	}
}

// Which of two rates is nearer, by ratio: 6 is 3/2 of 4 and 2/3 of 9, so that the prescaler decides.
func TestNearerProduct(t *testing.T) {
	for _, c := range []struct {
		q          *big.Rat
		p4, p9, is uint64
	}{{big.NewRat(6, 1), 2, 3, 4}, {big.NewRat(6, 1), 2, 2, 4}, {big.NewRat(6, 1), 2, 1, 9}, {big.NewRat(599, 100), 2, 1, 4}, {big.NewRat(601, 100), 2, 3, 9},
		{big.NewRat(4, 1), 2, 1, 4}, {big.NewRat(9, 1), 2, 3, 9}} {
		if got := nearer(c.q, product{4, c.p4}, product{9, c.p9}); got.x != c.is {
			t.Errorf("of 4 (p = %d) and 9 (p = %d), nearer to %s: %d", c.p4, c.p9, c.q, got.x)
		}
	}
}

// register is a pair of register values.
type register struct{ prescaler, reload int64 }

// brute is a small timer with all its settings by integer arithmetic: the clock counts of a tick, each with the settings that make it,
// least prescaler first.
type brute struct {
	timer  *loop.Timer
	clock  int64
	counts []int64 // distinct, ascending
	by     map[int64][]register
}

func (b *brute) String() string {
	return fmt.Sprintf("%d Hz, %d × %d bits, counting %d, postscale %d", b.clock, b.timer.PrescalerBits, b.timer.ReloadBits, b.timer.Counting, b.timer.Postscale)
}

func bruteTimer(clock int64, prescaler, reload int, counting loop.Counting, postscale int) *brute {
	b := &brute{clock: clock, by: map[int64][]register{}, timer: &loop.Timer{Clock: big.NewRat(clock, 1),
		PrescalerBits: prescaler, ReloadBits: reload, Counting: counting, Postscale: postscale}}
	for p := int64(0); p < 1<<prescaler; p++ {
		for n := int64(0); n < 1<<reload; n++ {
			counts := (p + 1) * (n + 1) * int64(postscale)
			if counting == loop.CountCenter {
				if n == 0 {
					continue
				}
				counts = 2 * (p + 1) * n * int64(postscale)
			}
			if b.by[counts] == nil {
				b.counts = append(b.counts, counts)
			}
			b.by[counts] = append(b.by[counts], register{p, n})
		}
	}
	slices.Sort(b.counts)
	return b
}

// smallTimers have a wide prescaler, a wide reload, none, and one bit of each.
func smallTimers() (out []*brute) {
	for _, width := range [][2]int{{4, 6}, {6, 4}, {0, 5}, {6, 1}, {3, 3}} {
		for _, counting := range []loop.Counting{loop.CountUp, loop.CountCenter} {
			for _, postscale := range []int{1, 3} {
				out = append(out, bruteTimer(1_000_003, width[0], width[1], counting, postscale)) // a prime: nothing divides by accident
			}
		}
	}
	return out
}

// rate of a number of clock counts, exact.
func (b *brute) rate(counts int64) *big.Rat { return big.NewRat(b.clock, counts) }

// nearest is what timerSetting must find: the counts with the least ratio error within the limits, of equal ones those with the least prescaler;
// all by products of 64-bit whole numbers, which hold every figure of these timers.
func (b *brute) nearest(wanted, low, high *big.Rat) (setting register, rate *big.Rat) {
	// The rate clock/c against num/den is num·c to clock·den.
	sides := func(c int64, f *big.Rat) (uint64, uint64) {
		return uint64(f.Num().Int64() * c), uint64(b.clock * f.Denom().Int64())
	}
	var more, less uint64 // the error of the best is more/less, ends of a ratio
	for _, c := range b.counts {
		if low != nil {
			if x, y := sides(c, low); x > y {
				continue // below low
			}
		}
		if high != nil {
			if x, y := sides(c, high); x < y {
				continue
			}
		}
		x, y := sides(c, wanted)
		x, y = max(x, y), min(x, y)
		oldHi, oldLo := bits.Mul64(more, y)
		newHi, newLo := bits.Mul64(x, less)
		nearer, same := newHi < oldHi || newHi == oldHi && newLo < oldLo, newHi == oldHi && newLo == oldLo
		if least := b.by[c][0]; rate == nil || nearer || same && least.prescaler < setting.prescaler {
			more, less, setting, rate = x, y, least, b.rate(c)
		}
	}
	return setting, rate
}

// wants are rates to ask a timer for: what it makes, what lies between, what lies beyond, and rates exactly as far from one rate as from the next.
func (b *brute) wants() (out []*big.Rat) {
	for i := 0; i < len(b.counts); i += 1 + i/5 {
		c := b.counts[i]
		out = append(out, b.rate(c))
		if i+1 < len(b.counts) {
			d := b.counts[i+1]
			out = append(out, big.NewRat(2*b.clock, c+d), new(big.Rat).Quo(new(big.Rat).Add(b.rate(c), b.rate(d)), big.NewRat(2, 1)))
			if m := int64(math.Round(math.Sqrt(float64(c * d)))); m*m == c*d {
				out = append(out, b.rate(m))
			}
		}
	}
	return append(out, big.NewRat(1, 1_000_000), big.NewRat(1_000_000_000, 1), big.NewRat(977, 7))
}

// Every setting of small timers, by brute force: what is chosen is one of them and makes its rate exactly, none within the limits
// is nearer, and of equal ones the prescaler is the least.
func TestTimerEverySetting(t *testing.T) {
	for _, b := range smallTimers() {
		for _, wanted := range b.wants() {
			part := func(percent int64) *big.Rat { return new(big.Rat).Mul(wanted, big.NewRat(percent, 100)) }
			for _, limits := range [][2]*big.Rat{{nil, nil}, {wanted, nil}, {nil, wanted}, {wanted, wanted}, {part(101), part(104)}, {part(30), part(95)},
				{part(99), part(101)}, {part(200), part(100)}, {new(big.Rat), part(80)}} {
				b.checkSetting(t, wanted, limits[0], limits[1])
			}
		}
	}
}

func (b *brute) checkSetting(t *testing.T, wanted, low, high *big.Rat) {
	t.Helper()
	name := fmt.Sprintf("%v: wanted %s, from %s to %s", b, wanted, low, high)
	c, ok := timerSetting(b.timer, wanted, low, high)
	want, rate := b.nearest(wanted, low, high)
	if ok != (rate != nil) {
		t.Fatalf("%s: found %v, brute force %v", name, ok, rate)
	}
	if !ok {
		return
	}
	s := c.setting(wanted)
	if (register{s.Prescaler, s.Reload}) != want || c.rate().Cmp(rate) != 0 {
		t.Fatalf("%s: %+v, want %+v, %s Hz", name, s, want, rate)
	}
	if new(big.Rat).Mul(c.period(), rate).Cmp(big.NewRat(1, 1)) != 0 {
		t.Fatalf("%s: a period of %s at %s Hz", name, c.period(), rate)
	}
	f, _ := rate.Float64()
	w, _ := wanted.Float64()
	ppm := (f/w - 1) * 1e6
	if s.RateHz != f || s.WantedHz != w || !(math.Abs(s.ErrorPPM-ppm) <= 1e-9*(1e6+math.Abs(ppm))) { // a few roundings of a ratio, 2.2e-16 of 1e6 each
		t.Fatalf("%s: %+v, want %g Hz, %g ppm", name, s, f, ppm)
	}
}

// The rates beside every rate of a small timer, and beside what lies between two of them: no rate is missed, none told twice.
func TestTimerNeighbours(t *testing.T) {
	for _, b := range smallTimers() {
		for i := 0; i < len(b.counts); i += 1 + i/20 {
			for _, k := range []int{0, 1, 3, 9} {
				b.checkNear(t, big.NewRat(b.counts[i], b.clock), i, i+1, k)
				// Half a count more, between this one and the next.
				b.checkNear(t, big.NewRat(2*b.counts[i]+1, 2*b.clock), i+1, i+1, k)
			}
		}
		b.checkNear(t, big.NewRat(1, 1_000_000_000), 0, 0, 5)
		b.checkNear(t, big.NewRat(1_000_000_000, 1), len(b.counts), len(b.counts), 5)
	}
}

// checkNear: counts[:less] are below the period, counts[more:] above it.
func (b *brute) checkNear(t *testing.T, period *big.Rat, less, more, k int) {
	t.Helper()
	var want []int64 // from slow to fast
	want = append(want, b.counts[more:min(more+k, len(b.counts))]...)
	slices.Reverse(want)
	below := slices.Clone(b.counts[max(less-k, 0):less])
	slices.Reverse(below)
	want = append(want, below...)
	got := timerNear(b.timer, period, k)
	if len(got) != len(want) {
		t.Fatalf("%v, %d beside %s s: %d rates, want %d", b, k, period, len(got), len(want))
	}
	for i, c := range got {
		s := c.setting(c.rate())
		if c.rate().Cmp(b.rate(want[i])) != 0 || (register{s.Prescaler, s.Reload}) != b.by[want[i]][0] || s.ErrorPPM != 0 {
			t.Fatalf("%v, %d beside %s s: rate %d is %s Hz with %+v, want %s Hz with %+v", b, k, period, i, c.rate(), s, b.rate(want[i]), b.by[want[i]][0])
		}
	}
}

// The list of rates in a range: all of them, or at most as many as asked for, each one of them.
func TestTimerList(t *testing.T) {
	for _, b := range smallTimers() {
		for _, span := range [][2]float64{{1000, 9000}, {1, 1e7}, {5000, 5100}, {2e7, 3e7}, {1e-6, 1e-5}, {hertz(b.rate(b.counts[0])), hertz(b.rate(b.counts[0]))}} {
			low, high := new(big.Rat).SetFloat64(span[0]), new(big.Rat).SetFloat64(span[1])
			var want []float64
			for _, c := range slices.Backward(b.counts) {
				if f := b.rate(c); f.Cmp(low) >= 0 && f.Cmp(high) <= 0 {
					want = append(want, hertz(f))
				}
			}
			for _, n := range []int{1, 2, 7, 40, len(want), 10_000} {
				got := timerList(b.timer, span[0], span[1], n)
				if n >= len(want) && !slices.Equal(got, want) {
					t.Fatalf("%v in %v: %d rates, want all %d", b, span, len(got), len(want))
				}
				if len(got) > n || n > 0 && len(want) > 0 && len(got) == 0 || !slices.IsSorted(got) || len(slices.Compact(slices.Clone(got))) != len(got) {
					t.Fatalf("%v in %v: %d rates of %d, at most %d: %v", b, span, len(got), len(want), n, got)
				}
				for _, f := range got {
					if !slices.Contains(want, f) {
						t.Fatalf("%v in %v: %g Hz is not a rate of the timer", b, span, f)
					}
				}
			}
		}
	}
	timer := smallTimers()[0].timer
	for _, span := range [][2]float64{{0, 1}, {-1, 1}, {2, 1}, {math.NaN(), 1}, {1, math.NaN()}, {1, math.Inf(1)}} {
		if got := timerList(timer, span[0], span[1], 5); len(got) != 0 {
			t.Errorf("in %v: %v", span, got)
		}
	}
	if got := timerList(timer, 1, 1e6, 0); len(got) != 0 {
		t.Errorf("none asked for: %v", got)
	}
}

// A thinned list covers the range evenly in logarithm: with 100 of a timer's dense rates no gap is more than two steps wide.
func TestTimerListEven(t *testing.T) {
	timer := &loop.Timer{Clock: big.NewRat(72_000_000, 1), PrescalerBits: 16, ReloadBits: 16, Postscale: 1}
	got := timerList(timer, 50, 50_000, 100)
	if len(got) != 100 || got[0] > 50.1 || got[99] < 49_900 {
		t.Fatalf("%d rates from %g to %g Hz", len(got), got[0], got[len(got)-1])
	}
	for i := range got[1:] {
		if r := got[i+1] / got[i]; !(r > 1 && r < math.Pow(1000, 2.0/99)) {
			t.Errorf("from %g to %g Hz", got[i], got[i+1])
		}
	}
}
