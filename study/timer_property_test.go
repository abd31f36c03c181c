package study

import (
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"

	"steadytick/loop"
)

// anyTimer draws a timer of any size.
func anyTimer(t *rapid.T) *loop.Timer {
	return &loop.Timer{
		Clock:         big.NewRat(rapid.Int64Range(1, 1e12).Draw(t, "clock"), rapid.Int64Range(1, 1000).Draw(t, "over")),
		PrescalerBits: rapid.IntRange(0, 32).Draw(t, "prescaler"), ReloadBits: rapid.IntRange(1, 32).Draw(t, "reload"),
		Counting: loop.Counting(rapid.IntRange(0, 1).Draw(t, "counting")), Postscale: rapid.IntRange(1, 65536).Draw(t, "postscale"),
	}
}

// byRegisters is the rate of register values as the formula has it.
func byRegisters(t *loop.Timer, s TimerSetting) *big.Rat {
	counts := new(big.Int).Mul(big.NewInt(s.Prescaler+1), big.NewInt(s.Reload+1))
	if t.Counting == loop.CountCenter {
		counts.Mul(big.NewInt(2*(s.Prescaler+1)), big.NewInt(s.Reload))
	}
	counts.Mul(counts, big.NewInt(int64(t.Postscale)))
	return new(big.Rat).Quo(t.Clock, new(big.Rat).SetInt(counts))
}

// Timers of any size: the registers hold the setting and make its rate exactly; nothing leaves the limits; what the timer makes is found, and
// the neighbours enclose it.
func TestTimerProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		for range cheap {
			timerHolds(t)
		}
	})
}

// cheap: a draw of these properties takes microseconds, unlike the others of this package, whose number of draws holds here too.
const cheap = 40

func timerHolds(t *rapid.T) {
	timer := anyTimer(t)
	wanted := new(big.Rat).SetFloat64(math.Exp(rapid.Float64Range(-13, 20).Draw(t, "log rate")))
	low := new(big.Rat).Mul(wanted, big.NewRat(99, 100))
	high := new(big.Rat).Mul(wanted, big.NewRat(103, 100))
	c, ok := timerSetting(timer, wanted, low, high)
	near := timerNear(timer, new(big.Rat).Inv(wanted), 2)
	if ok {
		near = append(near, c)
	}
	for _, x := range near {
		s := x.setting(wanted)
		least := int64(0)
		if timer.Counting == loop.CountCenter {
			least = 1
		}
		if s.Prescaler < 0 || s.Prescaler >= 1<<timer.PrescalerBits || s.Reload < least || s.Reload >= 1<<timer.ReloadBits {
			t.Fatalf("%+v leaves the registers of %+v", s, timer)
		}
		if byRegisters(timer, s).Cmp(x.rate()) != 0 {
			t.Fatalf("the registers make %s Hz, not %s", byRegisters(timer, s), x.rate())
		}
	}
	if !ok {
		return
	}
	if c.rate().Cmp(low) < 0 || c.rate().Cmp(high) > 0 {
		t.Fatalf("outside the limits: %s", c.rate().FloatString(6))
	}
	own, ok := timerSetting(timer, c.rate(), c.rate(), c.rate())
	if !ok || own.rate().Cmp(c.rate()) != 0 || own.setting(wanted).Prescaler > c.setting(wanted).Prescaler {
		t.Fatalf("its own rate is not found: %v, %v", own, c)
	}
	for _, x := range timerNear(timer, c.period(), 1) {
		if ratio := new(big.Rat).Quo(x.rate(), wanted); x.rate().Cmp(low) >= 0 && x.rate().Cmp(high) <= 0 && farther(ratio, new(big.Rat).Quo(c.rate(), wanted)) < 0 {
			t.Fatalf("%s Hz is nearer to %s Hz than %s Hz", x.rate(), wanted, c.rate())
		}
	}
}

// farther compares how far two ratios are from 1.
func farther(a, b *big.Rat) int {
	one := big.NewRat(1, 1)
	if a.Cmp(one) < 0 {
		a = new(big.Rat).Inv(a)
	}
	if b.Cmp(one) < 0 {
		b = new(big.Rat).Inv(b)
	}
	return a.Cmp(b)
}

func BenchmarkTimer(b *testing.B) {
	timer := func(prescaler, reload int) *loop.Timer {
		return &loop.Timer{Clock: big.NewRat(72_000_000, 1), PrescalerBits: prescaler, ReloadBits: reload, Postscale: 1}
	}
	for _, x := range []struct {
		name   string
		timer  *loop.Timer
		wanted *big.Rat
	}{
		{"16x16at1kHz", timer(16, 16), big.NewRat(997_001, 1000)},
		{"16x16at20mHz", timer(16, 16), big.NewRat(20_001, 1_000_000)},
		{"32x32at1kHz", timer(32, 32), big.NewRat(997_001, 1000)},
		{"32x32at1uHz", timer(32, 32), big.NewRat(1_000_003, 1_000_000_000_000)},
	} {
		b.Run(x.name, func(b *testing.B) {
			for b.Loop() {
				timerSetting(x.timer, x.wanted, nil, nil)
			}
		})
	}
	b.Run("list300of16x16", func(b *testing.B) {
		for b.Loop() {
			timerList(timer(16, 16), 0.1, 50_000, 300)
		}
	})
}
