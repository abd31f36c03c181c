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

// By hand: 72 MHz/1 kHz = 72 000 counts; the least prescaler with which they fit 16 bits is 1 (dividing by 2), reload 35 999.
func TestTimerByHand(t *testing.T) {
	timer := &loop.Timer{Clock: big.NewRat(72_000_000, 1), PrescalerBits: 16, ReloadBits: 16, Postscale: 1}
	khz := big.NewRat(1000, 1)
	c, ok := timerSetting(timer, khz, nil, nil)
	if got, want := c.setting(khz), (TimerSetting{Prescaler: 1, Reload: 35_999, RateHz: 1000, WantedHz: 1000}); !ok || got != want {
		t.Errorf("%+v, want %+v", got, want)
	}
	// Counting to the center and back, 20 kHz: 72 MHz/(2·20 kHz) = 1800 counts up, and every second period a tick: 900.
	timer.Counting, timer.Postscale = loop.CountCenter, 2
	c, ok = timerSetting(timer, big.NewRat(20_000, 1), nil, nil)
	if got, want := c.setting(big.NewRat(20_000, 1)), (TimerSetting{Prescaler: 0, Reload: 900, RateHz: 20_000, WantedHz: 20_000}); !ok || got != want {
		t.Errorf("%+v, want %+v", got, want)
	}
}

// everySetting is all settings of a small timer by integer arithmetic: register values and the counts of the clock in a tick.
func everySetting(t *loop.Timer) (out []struct{ prescaler, reload, counts int64 }) {
	for p := int64(0); p < 1<<t.PrescalerBits; p++ {
		for n := int64(0); n < 1<<t.ReloadBits; n++ {
			counts := (p + 1) * (n + 1) * int64(t.Postscale)
			if t.Counting == loop.CountCenter {
				if n == 0 {
					continue
				}
				counts = 2 * (p + 1) * n * int64(t.Postscale)
			}
			out = append(out, struct{ prescaler, reload, counts int64 }{p, n, counts})
		}
	}
	return out
}

// Every setting of small timers, by brute force: what is chosen is one of them and makes its rate exactly, none within the limits
// is nearer, and of equal ones the prescaler is the least.
func TestTimerEverySetting(t *testing.T) {
	const clock = 1_000_003 // prime: nothing divides by accident
	for _, counting := range []loop.Counting{loop.CountUp, loop.CountCenter} {
		for _, postscale := range []int{1, 3} {
			timer := &loop.Timer{Clock: big.NewRat(clock, 1), PrescalerBits: 4, ReloadBits: 6, Counting: counting, Postscale: postscale}
			all := everySetting(timer)
			for _, wanted := range []*big.Rat{big.NewRat(977, 1), big.NewRat(10_000, 1), big.NewRat(clock, 7), big.NewRat(clock, 90), big.NewRat(1, 1), big.NewRat(5_000_000, 1), big.NewRat(123_456, 100)} {
				for _, limits := range [][2]*big.Rat{{nil, nil}, {big.NewRat(900, 1), big.NewRat(20_000, 1)}, {wanted, nil}, {nil, wanted},
					{new(big.Rat).Mul(wanted, big.NewRat(101, 100)), new(big.Rat).Mul(wanted, big.NewRat(104, 100))}} {
					checkSetting(t, timer, all, clock, wanted, limits)
				}
			}
		}
	}
}

func checkSetting(t *testing.T, timer *loop.Timer, all []struct{ prescaler, reload, counts int64 }, clock int64, wanted *big.Rat, limits [2]*big.Rat) {
	t.Helper()
	name := fmt.Sprintf("counting %v, postscale %d, wanted %s, limits %v", timer.Counting, timer.Postscale, wanted.FloatString(3), limits)
	c, ok := timerSetting(timer, wanted, limits[0], limits[1])
	var best *big.Rat
	var least int64
	for _, s := range all {
		f := big.NewRat(clock, s.counts)
		if limits[0] != nil && f.Cmp(limits[0]) < 0 || limits[1] != nil && f.Cmp(limits[1]) > 0 {
			continue
		}
		if e := ratioError(f, wanted); best == nil || e.Cmp(best) < 0 {
			best, least = e, s.prescaler
		}
	}
	if ok != (best != nil) {
		t.Errorf("%s: found %v, brute force %v", name, ok, best != nil)
		return
	}
	if !ok {
		return
	}
	if e := ratioError(c.rate(), wanted); e.Cmp(best) != 0 {
		t.Errorf("%s: off by %s, the best by %s", name, e.FloatString(9), best.FloatString(9))
	}
	s := c.setting(wanted)
	if s.Prescaler != least {
		t.Errorf("%s: prescaler %d, the least of equal ones is %d", name, s.Prescaler, least)
	}
	for _, x := range all {
		if x.prescaler == s.Prescaler && x.reload == s.Reload {
			if f := big.NewRat(clock, x.counts); c.rate().Cmp(f) != 0 || s.RateHz != hertz(f) {
				t.Errorf("%s: the registers make %s Hz, said %s", name, f.FloatString(6), c.rate().FloatString(6))
			}
			ppm := (s.RateHz/hertz(wanted) - 1) * 1e6
			if !(math.Abs(ppm-s.ErrorPPM) <= 1e-9*(1e6+math.Abs(ppm))) { // two roundings of a ratio
				t.Errorf("%s: error %g ppm, want %g", name, s.ErrorPPM, ppm)
			}
			return
		}
	}
	t.Errorf("%s: no register holds %+v", name, s)
}

// The rates beside a rate, and the list of all rates in a range, against brute force.
func TestTimerNeighbours(t *testing.T) {
	const clock = 1_000_003
	for _, counting := range []loop.Counting{loop.CountUp, loop.CountCenter} {
		timer := &loop.Timer{Clock: big.NewRat(clock, 1), PrescalerBits: 4, ReloadBits: 6, Counting: counting, Postscale: 3}
		var counts []int64
		for _, s := range everySetting(timer) {
			counts = append(counts, s.counts)
		}
		slices.Sort(counts)
		counts = slices.Compact(counts)
		for i, own := range counts {
			var want, got []string
			for k := min(i+3, len(counts)-1); k >= max(i-3, 0); k-- { // more counts first: from slow to fast
				if k != i {
					want = append(want, big.NewRat(clock, counts[k]).RatString())
				}
			}
			for _, c := range timerNear(timer, big.NewRat(own, clock), 3) {
				got = append(got, c.rate().RatString())
			}
			if !slices.Equal(got, want) {
				t.Fatalf("counting %v, beside %d counts: %v, want %v", counting, own, got, want)
			}
		}
		var want []float64
		for k := len(counts) - 1; k >= 0; k-- {
			if f := clock / float64(counts[k]); f >= 1000 && f <= 9000 {
				want = append(want, hertz(big.NewRat(clock, counts[k])))
			}
		}
		if got := timerList(timer, 1000, 9000, 10_000); !slices.Equal(got, want) {
			t.Errorf("counting %v: %d rates, want %d", counting, len(got), len(want))
		}
		if got := timerList(timer, 1000, 9000, 20); len(got) < 10 || len(got) > 20 || !slices.IsSorted(got) {
			t.Errorf("thinned to %d rates", len(got))
		}
	}
}

// Large timers neither overflow nor take long, and keep to their registers and limits.
func TestTimerProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		timer := &loop.Timer{
			Clock:         big.NewRat(rapid.Int64Range(1, 1e12).Draw(t, "clock"), rapid.Int64Range(1, 1000).Draw(t, "over")),
			PrescalerBits: rapid.IntRange(0, 32).Draw(t, "prescaler"), ReloadBits: rapid.IntRange(1, 32).Draw(t, "reload"),
			Counting: loop.Counting(rapid.IntRange(0, 1).Draw(t, "counting")), Postscale: rapid.IntRange(1, 65536).Draw(t, "postscale"),
		}
		wanted := new(big.Rat).SetFloat64(math.Exp(rapid.Float64Range(-13, 20).Draw(t, "log rate")))
		low := new(big.Rat).Mul(wanted, big.NewRat(99, 100))
		c, ok := timerSetting(timer, wanted, low, nil)
		for _, x := range append(timerNear(timer, new(big.Rat).Inv(wanted), 2), c) {
			if x.t == nil {
				continue
			}
			s := x.setting(wanted)
			if s.Prescaler < 0 || s.Prescaler >= 1<<timer.PrescalerBits || s.Reload < 0 || s.Reload >= 1<<timer.ReloadBits {
				t.Fatalf("%+v leaves the registers of %+v", s, timer)
			}
		}
		if ok && c.rate().Cmp(low) < 0 {
			t.Fatalf("below the limit: %s", c.rate().FloatString(6))
		}
	})
}
