package loop

import (
	"math"
	"math/big"
	"reflect"
	"strings"
	"testing"
)

const plain = "loop: a\nplant: {model: 1/(s + 1)}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz, compute: 20 us}\n"

func good(t *testing.T, text string) *Loop {
	t.Helper()
	l, problems := Parse("good.yaml", []byte(text), nil)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	return l
}

func TestTimerSection(t *testing.T) {
	l := good(t, plain+"timer: {clock: 72 MHz, prescaler_bits: 16, reload_bits: 16, counting: center, postscale: 3}\n")
	want := &Timer{Clock: big.NewRat(72_000_000, 1), PrescalerBits: 16, ReloadBits: 16, Counting: CountCenter, Postscale: 3}
	if !reflect.DeepEqual(l.Timer, want) {
		t.Errorf("%+v, want %+v", l.Timer, want)
	}
	l = good(t, plain+"timer: {clock: 16 MHz, reload_bits: 8}\n")
	want = &Timer{Clock: big.NewRat(16_000_000, 1), ReloadBits: 8, Postscale: 1}
	if !reflect.DeepEqual(l.Timer, want) {
		t.Errorf("%+v, want %+v", l.Timer, want)
	}
}

func TestProcessorSection(t *testing.T) {
	for text, want := range map[string]*Processor{
		"{cost: 55 us, budget: 40 %}":                         {Cost: big.NewRat(55, 1_000_000), Budget: big.NewRat(2, 5)},
		"{cost_cycles: 3960, clock: 72 MHz}":                  {Cost: big.NewRat(55, 1_000_000), Budget: big.NewRat(1, 1)},
		"{budget: 12.5 %}":                                    {Budget: big.NewRat(1, 8)},
		"{cost_cycles: 2*1980, clock: 72 MHz, budget: 100 %}": {Cost: big.NewRat(55, 1_000_000), Budget: big.NewRat(1, 1)},
	} {
		if got := good(t, plain+"processor: "+text+"\n").Processor; !reflect.DeepEqual(got, want) {
			t.Errorf("%s: %+v, want %+v", text, got, want)
		}
	}
}

func TestSearchAndDisturbances(t *testing.T) {
	l := good(t, plain+"rate: {from: 50 Hz}\ndisturbances:\n  - sine: {name: gear mesh, at: sensor, size: 0.002, frequency: 310 rad/s}\n  - sine: {frequency: 50 Hz}\n")
	if l.Search == nil || l.Search.From.Cmp(big.NewRat(50, 1)) != 0 || l.Search.To != nil {
		t.Errorf("%+v", l.Search)
	}
	if len(l.Disturbances) != 2 {
		t.Fatalf("%+v", l.Disturbances)
	}
	d := l.Disturbances[0]
	if d.Name != "gear mesh" || d.At != "sensor" || d.Size != 0.002 || d.SizeExact.Cmp(big.NewRat(2, 1000)) != 0 || d.Frequency.Cmp(big.NewRat(310, 1)) != 0 {
		t.Errorf("%+v", d)
	}
	if d := l.Disturbances[1]; d.At != "output" || d.SizeExact != nil {
		t.Errorf("%+v", d)
	}
}

// The ends of every range of numbers are inside it; units are converted exactly.
func TestHardwareLimits(t *testing.T) {
	for _, text := range []string{
		"timer: {clock: 1e12 Hz, prescaler_bits: 0, reload_bits: 1, postscale: 1}",
		"timer: {clock: 0.000001 Hz, prescaler_bits: 32, reload_bits: 32, postscale: 65536}",
		"timer: {clock: 1e6 MHz, reload_bits: 2^5}",
		"processor: {cost_cycles: 1e15, clock: 1 MHz, budget: 100 %}",
		"processor: {cost: 1e9 s}", // above compute, below it, above the tick: it is a cost all the same
		"processor: {cost: 1e-15 s}",
		"rate: {from: 1e-6 Hz, to: 1e9 Hz}",
		"rate: {}",
		"rate: {from: 1 Hz, to: 60.000001 rpm}",
		"disturbances: []",
		"disturbances: [" + strings.Repeat("{sine: {frequency: 1 Hz}}, ", 20) + "]",
	} {
		good(t, plain+text+"\n")
	}
	if got := good(t, plain+"timer: {clock: 48 kHz, reload_bits: 8}\n").Timer.Clock; got.Cmp(big.NewRat(48_000, 1)) != 0 {
		t.Errorf("48 kHz is %s Hz", got)
	}
	if got := good(t, plain+"rate: {from: 90 rpm}\n").Search.From; got.Cmp(big.NewRat(3, 2)) != 0 {
		t.Errorf("90 rpm is %s Hz", got)
	}
	// 310 Hz in rad/s: 620π = 1947.787445225672…, 16 digits of 50-digit arithmetic.
	d := good(t, plain+"disturbances: [{sine: {frequency: 310 Hz}}]\n").Disturbances[0]
	if f, _ := d.Frequency.Float64(); !(math.Abs(f-1947.787445225672) <= 1e-12) { // the last digit given, and half a unit of a float64 there, 1.1e-13
		t.Errorf("310 Hz is %.17g rad/s", f)
	}
	s := good(t, plain+"disturbances: [{sine: {frequency: 1 kHz, at: input, size: -2}}, {sine: {frequency: 2 Hz, name: b, at: output}}]\n").Disturbances
	if len(s) != 2 || s[0].At != "input" || s[0].Size != -2 || s[1].Name != "b" || s[1].At != "output" {
		t.Errorf("%+v", s)
	}
	none := good(t, plain)
	if none.Timer != nil || none.Processor != nil || none.Search != nil || none.Disturbances != nil {
		t.Errorf("sections out of nothing: %+v", none)
	}
}
