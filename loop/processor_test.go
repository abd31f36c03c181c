package loop

import (
	"math/big"
	"reflect"
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
