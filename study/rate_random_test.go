package study

import (
	"context"
	"fmt"
	"math"
	"math/rand"
	"os"
	"strconv"
	"testing"
)

// The intervals of random loops with a lightly damped mode, against the loop itself at random rates. The loop of seed 3 has islands of stability half a
// per cent wide where the mode hides, and within them figures that no other rate has. WINDOWS=n takes n more loops.
func TestWindowsOfRandomLoops(t *testing.T) {
	seeds := []int64{3, 21}
	more, _ := strconv.Atoi(os.Getenv("WINDOWS"))
	for k := range more {
		seeds = append(seeds, int64(1000+k))
	}
	points := 400
	if more > 0 {
		points = 3000
	}
	for _, k := range seeds {
		rng := rand.New(rand.NewSource(k))
		w := math.Pow(10, rng.Float64()*2)
		z := math.Pow(10, -rng.Float64()*3)
		plant := fmt.Sprintf("%.4g/(s*(s+%.4g))*1/(s^2/%.6g+%.5g*s+1)", 5*rng.Float64()+0.5, 0.5+5*rng.Float64(), w*w, 2*z/w)
		if rng.Intn(3) == 0 {
			plant = fmt.Sprintf("%.4g/((s+%.4g)*(s^2/%.6g+%.5g*s+1))*exp(-%.3g*s)", 5*rng.Float64()+0.5, 0.5+5*rng.Float64(), w*w, 2*z/w, 0.2*rng.Float64())
		}
		maps := []string{"tustin", "matched", "backward", "hold", "triangle", "forward"}
		text := fmt.Sprintf("loop: a\nplant: {model: %s}\ncontroller: {model: %.3g*(s/%.3g+1)/(s/%.3g+1), map: %s}\ntiming: {rate: 100 Hz, compute: %.3g ms, update: %s}\ninputs: [{step: 1},{ramp: 1}]\nrate: {from: 0.5 Hz, to: 500 Hz}\nrequirements:\n  - phase_margin >= %.3g deg\n  - gain_margin >= %.3g dB\n  - modulus_margin >= %.3g\n  - bandwidth >= %.3g rad/s\n  - delay_margin >= %.3g ms\n  - crossover <= %.3g rad/s\n  - ripple <= %.3g\n",
			plant, 0.2+3*rng.Float64(), 0.5+3*rng.Float64(), 10+50*rng.Float64(), maps[rng.Intn(6)], rng.Float64()*1.5, []string{"when_ready", "next_tick"}[rng.Intn(2)],
			20+40*rng.Float64(), 3+6*rng.Float64(), 0.2+0.5*rng.Float64(), 0.5+3*rng.Float64(), 20+200*rng.Float64(), 1+3*rng.Float64(), math.Pow(10, -1-4*rng.Float64()))
		l := parsed(t, text)
		r, err := RunRate(context.Background(), l, RateOptions{})
		if err != nil {
			t.Errorf("%d: %v\n%s", k, err, text)
			continue
		}
		s, _ := newSweeper(l, nil)
		list, _ := constraints(l)
		bad := 0
		tries := []float64{}
		if k == 3 {
			for f := 1.735; f < 1.775; f += 0.0004 { // about the islands
				tries = append(tries, f)
			}
		}
		for i := range points {
			tries = append(tries, 0.5*math.Pow(1000, (float64(i)+rng.Float64())/float64(points)))
		}
		for _, hz := range tries {
			p := s.at(periodOf(hz), []mapped{{"x", l}})[0]
			for c, q := range list {
				if !r.Windows[c].Judged {
					continue
				}
				if got := met(q.slack(p)); got != inSpans(merged(r.Windows[c].Intervals), hz) {
					bad++
					if bad < 4 {
						t.Errorf("%d: %s at %.9g Hz met %v slack %g, intervals %v", k, q.text, hz, got, q.slack(p), r.Windows[c].Intervals)
					}
				}
			}
		}
		if bad > 0 {
			t.Logf("%d: %d bad\n%s", k, bad, text)
		}
	}
}
