package study

import (
	"fmt"
	"math/big"

	"steadytick/loop"
)

// variant is one way to run the sampled loop in the degradation study.
type variant struct {
	name  string
	loop  *loop.Loop // at the variant's rate
	run   *analyzed  // nil where the variant cannot run: note says why
	note  string
	built bool // on the hardware of the file
	seed  uint64
}

// asBuilt names the loop on the hardware that the file declares.
const asBuilt = "as built"

// variants builds the loop at its own rate and delay first, then the rates and delays of the study.
func variants(l *loop.Loop, own *analyzed, d Degrade, seed uint64) []variant {
	out := []variant{{name: "sampled at " + rateText(l.Timing.Period), loop: l, run: own}}
	rates := d.Rates
	if l.Controller.Digital {
		rates = nil // valid at one rate only
	}
	for _, f := range rates {
		period := new(big.Rat).Quo(l.Timing.Period, f)
		v := variant{name: fmt.Sprintf("at %s (%s× rate)", rateText(period), ratText(f))}
		other, problems := l.WithRate(period)
		if len(problems) > 0 {
			v.note = problems[0].Message
		} else {
			v.loop = other
			v.analyse(own.block.held.held, other.Timing.LoopDelay())
		}
		out = append(out, v)
	}
	for _, x := range d.Delays {
		v := variant{name: "no delay", loop: l}
		delay := new(big.Rat)
		if !x.None {
			v.name = fmt.Sprintf("%d more ticks of delay", x.Extra)
			if x.Extra == 1 {
				v.name = "one more tick of delay"
			}
			delay.Mul(l.Timing.Period, big.NewRat(int64(x.Extra), 1))
			delay.Add(delay, l.Timing.LoopDelay())
		}
		v.analyse(own.block.held.held, delay)
		out = append(out, v)
	}
	if declaresHardware(l) {
		v := variant{name: asBuilt, loop: l, run: own, built: true, seed: seed}
		if v.note = mechanicsFit(l); v.note != "" {
			v.run = nil
		}
		out = append(out, v)
	}
	return out
}

// analyse fills run for v.loop with the given delay.
func (v *variant) analyse(h held, delay *big.Rat) {
	b, err := assembleSampled(v.loop, h, v.loop.Timing.Period, delay)
	if err == nil {
		v.run, err = analyze(b)
	}
	if err != nil {
		v.note = err.Error()
	}
}

// ratText writes a factor shortly: 2, 0.5, 1/3.
func ratText(f *big.Rat) string {
	x, _ := f.Float64()
	return number(x)
}

// rateText writes the rate of a period with a unit that suits it.
func rateText(period *big.Rat) string {
	hz, _ := new(big.Rat).Inv(period).Float64()
	return hertzText(hz)
}

// RateText writes a rate in Hz with a unit that suits it, four digits.
func RateText(hz float64) string { return hertzText(hz) }

func hertzText(hz float64) string {
	switch {
	case hz >= 1e6:
		return number(hz/1e6) + " MHz"
	case hz >= 1e3:
		return number(hz/1e3) + " kHz"
	case hz >= 0.1:
		return number(hz) + " Hz"
	}
	return number(hz*1e3) + " mHz"
}
