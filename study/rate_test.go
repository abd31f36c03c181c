package study

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steadytick/loop"
)

func rateOf(t testing.TB, text string, o RateOptions) *Rate {
	t.Helper()
	r, err := RunRate(context.Background(), parsed(t, text), o)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// The largest stable gain of K/(s(s+1)) under a hold, recomputed with 50 digits (the list of check values): read the other way round,
// the loop with that gain stops being stable at that tick. 10/(s(s+1)): T = 0.207146502944 s.
func TestStableWindowEnds(t *testing.T) {
	for _, c := range []struct {
		gain   string
		update string
		tick   float64
	}{
		{"10", "when_ready", 0.207146502944},
		{"2.392211191177", "when_ready", 1},
		{"4.361993867092", "when_ready", 0.5},
		{"20.33892560993", "when_ready", 0.1},
		{"0.8047185265209", "next_tick", 1},
		{"6.846364201313", "next_tick", 0.1},
	} {
		r := rateOf(t, fmt.Sprintf("loop: a\nplant: {model: %s/(s*(s + 1))}\ncontroller: {model: 1}\ntiming: {rate: 100 Hz, update: %s}\n", c.gain, c.update), RateOptions{})
		if len(r.Windows) < 1 || r.Windows[0].Name != "stable" || len(r.Windows[0].Intervals) != 1 {
			t.Fatalf("%s: %+v", c.gain, r.Windows)
		}
		v := r.Windows[0].Intervals[0]
		// The gains and the tick are rounded to 12 or 13 digits; a relative error e of the gain moves the tick by less than 2e.
		if tick := 1 / v.Low.Value; !v.Low.OK || v.High.OK || !(math.Abs(tick-c.tick) <= 5e-12*c.tick) {
			t.Errorf("gain %s, %s: stable from T = %.13g s on, want %.12g", c.gain, c.update, tick, c.tick)
		}
	}
}

// Undamped plant 1/(s² + 1) under the gain −κ and one tick of delay. With c = cos T the characteristic polynomial is
//
//	z³ − 2c·z² + (1 − κ(1−c))·z − κ(1−c)
//
// and Jury's conditions come down to c > (κ−1)/(κ+2) for κ = 1/2, so the loop is stable exactly for
//
//	|T − 2πk| < arccos(−0.2),  T ≠ 2πk,   k = 0, 1, 2, …
//
// an island for every k.
func TestUndampedModeHasIslands(t *testing.T) {
	r := rateOf(t, `loop: mode
plant: {model: 1/(s^2 + 1)}
controller: {model: -1/2}
timing: {rate: 10 Hz, update: next_tick}
rate: {from: 0.04 Hz, to: 10 Hz}
`, RateOptions{})
	half := math.Acos(-0.2)
	var want []rateSpan // ascending in rate
	for k := 4; k >= 1; k-- {
		at := 2 * math.Pi * float64(k)
		want = append(want, rateSpan{1 / (at + half), 1 / (at - half)})
	}
	want = append(want, rateSpan{1 / half, math.Inf(1)})
	for len(want) > 0 && want[0].high < 0.04 {
		want = want[1:]
	}
	got := merged(r.Windows[0].Intervals)
	if want[0].low < 0.04 {
		want[0].low = 0
	}
	if len(got) != len(want) {
		t.Fatalf("%d islands, want %d: %v", len(got), len(want), got)
	}
	for i := range want {
		for _, x := range [2][2]float64{{got[i].low, want[i].low}, {got[i].high, want[i].high}} {
			// bounds are refined to 1e-13; near a bound the pole moves smoothly with T
			if !(x[0] == x[1] || math.Abs(x[0]-x[1]) <= 1e-11*x[1]) {
				t.Errorf("island %d: a bound at %.14g Hz, want %.14g", i, x[0], x[1])
			}
		}
	}
}

// merged joins intervals that touch but for a single pathological rate between them (1e-6 apart).
func merged(list []Interval) []rateSpan {
	var out []rateSpan
	for _, v := range list {
		s := rateSpan{0, math.Inf(1)}
		if v.Low.OK {
			s.low = v.Low.Value
		}
		if v.High.OK {
			s.high = v.High.Value
		}
		if n := len(out); n > 0 && s.low-out[n-1].high <= 1e-6*s.low {
			out[n-1].high = s.high
			continue
		}
		out = append(out, s)
	}
	return out
}

// The windows of starter files against brute force: every rate of a grid ten times finer lies on the side that the intervals say, and every
// bound holds 0.1 % to either side.
func TestWindowsAgainstBruteForce(t *testing.T) {
	for _, c := range []struct {
		name     string
		from, to string
	}{{"rotary", "20 Hz", "2 kHz"}, {"hydraulic", "1 Hz", "200 Hz"}, {"converter", "20 kHz", "500 kHz"}} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			src, err := os.ReadFile(filepath.Join("..", "cmd", "steadytick", "starters", c.name+".yaml"))
			if err != nil {
				t.Fatal(err)
			}
			l := parsed(t, string(src)+fmt.Sprintf("\nrate: {from: %s, to: %s}\n", c.from, c.to))
			r, err := RunRate(context.Background(), l, RateOptions{})
			if err != nil {
				t.Fatal(err)
			}
			bruteForce(t, l, r)
		})
	}
}

func bruteForce(t *testing.T, l *loop.Loop, r *Rate) {
	b, err := assembleContinuous(l)
	if err != nil {
		t.Fatal(err)
	}
	cont, err := analyze(b)
	if err != nil {
		t.Fatal(err)
	}
	s, err := newSweeper(l, cont)
	if err != nil {
		t.Fatal(err)
	}
	list, _ := constraints(l)
	want := wanted(list)
	at := func(hz float64) *ratePoint {
		p := s.at(periodOf(hz), []mapped{{"own", l}})[0]
		if err := s.simulate(context.Background(), p, want); err != nil {
			t.Fatal(err)
		}
		return p
	}
	lo, hi := r.SearchedHz[0], r.SearchedHz[1]
	n := int(10 * perDecade * math.Log10(hi/lo))
	if testing.Short() {
		n /= 10
	}
	points := make([]*ratePoint, n)
	if err := parallel(n, func(i int) error {
		points[i] = at(lo * math.Pow(hi/lo, (float64(i)+0.5)/float64(n)))
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	bounds := 0
	for i, c := range list {
		spans := merged(r.Windows[i].Intervals)
		for _, p := range points {
			if got := met(c.slack(p)); got != inSpans(spans, p.hz) {
				t.Errorf("%s at %.9g Hz: met is %v, the intervals %v say %v", c.text, p.hz, got, spans, !got)
			}
		}
		for _, v := range spans {
			for _, e := range []struct{ hz, in float64 }{{v.low, 1.001}, {v.high, 0.999}} {
				if e.hz == 0 || math.IsInf(e.hz, 1) {
					continue
				}
				bounds++
				if !met(c.slack(at(e.hz * e.in))) {
					t.Errorf("%s: 0.1 %% inside the bound %.9g Hz it is not met", c.text, e.hz)
				}
				if met(c.slack(at(e.hz / e.in))) {
					t.Errorf("%s: 0.1 %% outside the bound %.9g Hz it is met", c.text, e.hz)
				}
			}
		}
	}
	if bounds < 2 {
		t.Errorf("only %d bounds were looked at", bounds)
	}
}

const contradicting = `loop: contradiction
output: rad
effort: V
plant: {model: 10/(s*(s + 1))}
controller: {model: (s + 1)/(0.05*s + 1), map: tustin}
timing: {rate: 100 Hz, compute: 4 ms}
processor: {cost: 9 ms, budget: 20 %}
inputs:
  - ramp: 1
requirements:
  - phase_margin >= 55 deg
  - ramp_error <= 0.12
  - bandwidth >= 1 Hz
`

// A faster rate is needed than the processor allows: the explanation names the two, and each limit it proposes opens a window.
func TestContradictionIsExplained(t *testing.T) {
	r := rateOf(t, contradicting, RateOptions{})
	if len(r.WindowHz) != 0 || r.Pick != nil || r.Conflict == nil {
		t.Fatalf("window %v, pick %v", r.WindowHz, r.Pick)
	}
	k := r.Conflict
	if len(k.Sets) != 1 || strings.Join(k.Sets[0], " | ") != "phase_margin >= 55 deg | processor_load <= 20 %" {
		t.Errorf("sets %q", k.Sets)
	}
	if len(k.Text) == 0 || !strings.Contains(k.Text[0], "processor_load") || !strings.Contains(r.Verdict, "No sample rate") {
		t.Errorf("text %q, verdict %q", k.Text, r.Verdict)
	}
	opened := 0
	for _, q := range k.Relaxations {
		if !q.Enough.OK {
			continue
		}
		opened++
		text := contradicting
		switch {
		case strings.HasPrefix(q.Requirement, "processor_load"):
			text = strings.Replace(text, "budget: 20 %", fmt.Sprintf("budget: %.17g %%", q.Enough.Value), 1)
		case strings.HasPrefix(q.Requirement, "phase_margin"):
			text = strings.Replace(text, "phase_margin >= 55", fmt.Sprintf("phase_margin >= %.17g", q.Enough.Value), 1)
		default:
			t.Errorf("unexpected relaxation of %q to %v", q.Requirement, q.Enough)
		}
		relaxed := rateOf(t, text, RateOptions{})
		if len(relaxed.WindowHz) == 0 {
			t.Errorf("%q relaxed to %g opens no window", q.Requirement, q.Enough.Value)
		}
		// The smallest: four digits, and an infinitely narrow window at the optimum; half of the last digit less must not do.
		if strings.HasPrefix(q.Requirement, "phase_margin") {
			tight := rateOf(t, strings.Replace(contradicting, "phase_margin >= 55", fmt.Sprintf("phase_margin >= %.17g", q.Enough.Value*1.001), 1), RateOptions{})
			if len(tight.WindowHz) != 0 {
				t.Errorf("%q need not give way as far as %g", q.Requirement, q.Enough.Value)
			}
		}
	}
	if opened != 2 {
		t.Errorf("%d relaxations open the window, want both members of the set", opened)
	}
}

// Three that exclude each other only together, and one that no rate meets.
func TestImpossibleRequirement(t *testing.T) {
	r := rateOf(t, strings.Replace(contradicting, "ramp_error <= 0.12", "ramp_error <= 0.05", 1), RateOptions{})
	k := r.Conflict
	if k == nil || len(k.Impossible) != 1 || k.Impossible[0] != "ramp_error <= 0.05" {
		t.Fatalf("%+v", k)
	}
	w := window(t, r, "ramp_error <= 0.05")
	// Type 1, Kv = 10: the ramp error is 0.1 at every rate (final value theorem).
	if !w.Unchanged || !(math.Abs(w.Value.Value-0.1) <= 1e-12) || !strings.Contains(w.Note, "no rate changes it") {
		t.Errorf("%+v", w)
	}
	for _, q := range k.Relaxations {
		if q.Enough.OK {
			t.Errorf("%q alone cannot open the window", q.Requirement)
		}
	}
	if last := k.Text[len(k.Text)-1]; !strings.Contains(last, "all of them together") {
		t.Errorf("text %q", k.Text)
	}
}

func window(t *testing.T, r *Rate, text string) RateWindow {
	t.Helper()
	for _, w := range r.Windows {
		if w.Requirement == text {
			return w
		}
	}
	t.Fatalf("no row %q", text)
	return RateWindow{}
}

// A figure that no rate changes says so, whether it is met or not.
func TestUnchangedRequirement(t *testing.T) {
	r := rateOf(t, strings.NewReplacer("budget: 20 %", "budget: 90 %").Replace(contradicting), RateOptions{})
	w := window(t, r, "ramp_error <= 0.12")
	if !w.Unchanged || !strings.Contains(w.Note, "0.1 rad") {
		t.Errorf("%+v", w)
	}
	if window(t, r, "phase_margin >= 55 deg").Unchanged {
		t.Error("the phase margin changes with the rate")
	}
}

// The budget bounds the rate exactly: budget/cost, here 0.9/9 ms = 100 Hz; each microsecond of cost takes f/cost off.
func TestProcessorBound(t *testing.T) {
	r := rateOf(t, strings.Replace(contradicting, "budget: 20 %", "budget: 90 %", 1), RateOptions{})
	v := window(t, r, "processor_load <= 90 %").Intervals
	if len(v) != 1 || v[0].Low.OK || !(math.Abs(v[0].High.Value-100) <= 1e-10) {
		t.Errorf("intervals %v", v)
	}
	p := r.Pick
	if p == nil || !strings.HasPrefix(p.BindsAbove, "processor_load") || !strings.HasPrefix(p.BindsBelow, "phase_margin") {
		t.Fatalf("pick %+v", p)
	}
}

// The effect of a microsecond on the lower bound, against the bound found again with 100 us more compute time (a
// straight line over so short a way: 0.1 ms of a tick of some 10 ms; its bend is about a hundredth).
func TestComputeEffect(t *testing.T) {
	free := strings.Replace(contradicting, "processor: {cost: 9 ms, budget: 20 %}\n", "", 1)
	at := func(compute string) (float64, *Rate) {
		r := rateOf(t, strings.Replace(free, "compute: 4 ms", "compute: "+compute, 1), RateOptions{})
		if r.Pick == nil || !r.Pick.SlowestHz.OK {
			t.Fatalf("no pick: %s", r.PickNote)
		}
		return r.Pick.SlowestHz.Value, r
	}
	own, r := at("4 ms")
	later, _ := at("4.1 ms")
	got, want := r.ComputeEffect.LowerHzPerUS.Value, (later-own)/100
	if !(want > 0) || !(math.Abs(got-want) <= 0.03*want) {
		t.Errorf("%g Hz a microsecond, found again: %g", got, want)
	}
	fixed := rateOf(t, strings.Replace(free, "compute: 4 ms", "compute: 4 ms, update: next_tick", 1), RateOptions{})
	if e := fixed.ComputeEffect; e == nil || e.LowerHzPerUS.Value != 0 {
		t.Errorf("with update at the next tick: %+v", e)
	}
}

// Where frequencies land: sampling at fs shows f as |f − k·fs|.
func TestFolding(t *testing.T) {
	for _, c := range [][3]float64{{300, 1000, 300}, {700, 1000, 300}, {1040, 1000, 40}, {1500, 1000, 500}, {2000, 1000, 0}, {50, 40, 10}} {
		if got := folded(c[0], c[1]); got != c[2] {
			t.Errorf("%g Hz at %g Hz lands at %g, want %g", c[0], c[1], got, c[2])
		}
	}
	free := strings.Replace(contradicting, "processor: {cost: 9 ms, budget: 20 %}\n", "", 1)
	base := rateOf(t, free, RateOptions{})
	near := base.Pick.RateHz + 0.4 // lands at 0.4 Hz, inside the bandwidth
	text := free + fmt.Sprintf("disturbances:\n  - sine: {name: gear mesh, at: sensor, frequency: %.17g Hz}\n", near)
	r := rateOf(t, text, RateOptions{})
	if len(r.Folding) != 1 || r.Pick.RateHz == base.Pick.RateHz || !strings.Contains(r.Pick.Reason, "gear mesh") || r.Folding[0].Warning != "" {
		t.Errorf("the pick of %g Hz (%s) is not moved off the gear mesh: %+v", r.Pick.RateHz, r.Pick.Reason, r.Folding)
	}
	// Where no other round rate is in reach the fold is told. The window is that one rate, give or take 3 %.
	tight := fmt.Sprintf("rate: {from: %.17g Hz, to: %.17g Hz}\n", 0.97*base.Pick.RateHz, 1.03*base.Pick.RateHz)
	r = rateOf(t, text+tight, RateOptions{})
	if r.Pick.RateHz != base.Pick.RateHz || !strings.Contains(r.Folding[0].Warning, "gear mesh") {
		t.Fatalf("pick %g Hz, %+v", r.Pick.RateHz, r.Folding)
	}
	found := false
	for _, l := range r.Folding[0].Lands {
		if l.RateHz == r.Pick.RateHz {
			found = l.InsideBandwidth && math.Abs(l.LandsHz-0.4) <= 1e-9*near
		}
	}
	if !found {
		t.Errorf("lands at %+v", r.Folding[0].Lands)
	}
}

// Every map side by side: the row of the file's map is the main result, and a backward map, which adds lag, needs a faster rate than tustin.
func TestAllMaps(t *testing.T) {
	r := rateOf(t, strings.Replace(contradicting, "processor: {cost: 9 ms, budget: 20 %}\n", "", 1), RateOptions{AllMaps: true, Points: 60})
	slow := map[string]float64{}
	for _, m := range r.Maps {
		slow[m.Map] = m.SlowestHz.Value
	}
	if len(r.Maps) != 7 || r.Maps[0].Map != "tustin" || r.Maps[0].SlowestHz != r.Pick.SlowestHz {
		t.Fatalf("maps %v, pick %+v", slow, r.Pick)
	}
	alone := rateOf(t, strings.NewReplacer("processor: {cost: 9 ms, budget: 20 %}\n", "", "map: tustin", "map: backward").Replace(contradicting), RateOptions{})
	// bounds to 1e-13 of the same figure
	if got, want := slow["backward"], alone.Pick.SlowestHz.Value; !(math.Abs(got-want) <= 1e-11*want) {
		t.Errorf("backward from %.14g Hz, alone %.14g", got, want)
	}
}

func TestDigitalControllerHasNoRates(t *testing.T) {
	l := parsed(t, "loop: a\nplant: {model: 1/s}\ncontroller: {model: 0.1*z/(z - 0.5)}\ntiming: {rate: 10 Hz}\n")
	if _, err := RunRate(context.Background(), l, RateOptions{}); !errors.Is(err, ErrDigitalRate) {
		t.Errorf("error %v", err)
	}
}

func TestRateStops(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	o := RateOptions{Progress: func(string, int, int) { cancel() }}
	if _, err := RunRate(ctx, parsed(t, contradicting), o); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
}

// A timer whose rates lie far from the one wanted, or in a narrower interval of the window only, is told by the reason; one that misses the
// file's rate by a warning; and the pick is a rate that it makes, by whole numbers.
func TestPickKeepsToTheTimer(t *testing.T) {
	base := strings.Replace(contradicting, "processor: {cost: 9 ms, budget: 20 %}\n", "rate: {from: 5 Hz, to: 200 Hz}\n", 1)
	free := rateOf(t, base, RateOptions{})
	if free.Pick == nil || free.Pick.Timer != nil {
		t.Fatalf("%+v", free.Pick)
	}
	// 1000/(n) Hz with n up to 8: 125, 142.9, 166.7, 200 Hz within the window.
	r := rateOf(t, base+"timer: {clock: 1 kHz, reload_bits: 3}\n", RateOptions{})
	p := r.Pick
	if p == nil || p.Timer == nil || p.Timer.Reload != 7 || p.RateHz != 125 || !strings.Contains(p.Reason, "the timer's rate of the window nearest to") {
		t.Fatalf("%+v", p)
	}
	for _, w := range r.Warnings {
		if w.Code == "timer_misses_file_rate" && !strings.Contains(w.Text, "125 Hz") {
			t.Error(w.Text)
		}
	}
	if r := rateOf(t, base+"timer: {clock: 1 kHz, reload_bits: 1}\n", RateOptions{}); r.Pick != nil || !strings.Contains(r.Verdict, "the timer makes no rate of the window") {
		t.Errorf("%+v, %s", r.Pick, r.Verdict)
	}
	// The two intervals of the gantry: the timer makes rates of the slower, narrower one only.
	src, err := os.ReadFile("../testdata/loops/gantry-carriage.yaml")
	if err != nil {
		t.Fatal(err)
	}
	r = rateOf(t, string(src)+"\ntimer: {clock: 10 kHz, prescaler_bits: 8, reload_bits: 1, postscale: 60}\n", RateOptions{})
	if len(r.WindowHz) != 2 || r.Pick == nil || !(r.Pick.RateHz > r.WindowHz[0].Low.Value && r.Pick.RateHz < r.WindowHz[0].High.Value) {
		t.Errorf("window %v, pick %+v", r.WindowHz, r.Pick)
	}
}
