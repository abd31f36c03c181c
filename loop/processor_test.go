package loop

import (
	"math/big"
	"path/filepath"
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

// A loop at another rate that shares what it can equals the file read again, for every good file; where it cannot run the
// messages are those of reading it.
func TestWithRateSharing(t *testing.T) {
	paths, _ := filepath.Glob("testdata/good/*.yaml")
	starters, _ := filepath.Glob("../cmd/steadytick/starters/*.yaml")
	shared := 0
	for _, path := range append(paths, starters...) {
		l, problems := Load(path)
		if len(problems) > 0 {
			t.Fatal(problems)
		}
		for _, factor := range []*big.Rat{big.NewRat(1, 1), big.NewRat(13, 10), big.NewRat(1, 7), big.NewRat(1, 1000), big.NewRat(50, 1)} {
			period := new(big.Rat).Mul(l.Timing.Period, factor)
			o := l.options
			o.Period = new(big.Rat).Set(period)
			want, refused := ParseWith(l.File, l.Source, l.open, o)
			got, problems := l.WithRate(period)
			if (len(refused) > 0) != (len(problems) > 0) {
				t.Errorf("%s × %s: %v, read again: %v", path, factor, problems, refused)
				continue
			}
			if len(refused) > 0 {
				if l.sharing(period) != nil || problems.Error() != refused.Error() {
					t.Errorf("%s × %s: %v, read again: %v", path, factor, problems, refused)
				}
				continue
			}
			if l.sharing(period) != nil {
				shared++
			}
			same(t, path, got, want)
			// The map afterwards keeps the period.
			if m, problems := got.WithMap("backward"); len(problems) == 0 && m.Timing.Period.Cmp(period) != 0 {
				t.Errorf("%s: with another map the period is %s", path, m.Timing.Period)
			}
		}
	}
	if shared < 20 {
		t.Errorf("only %d loops were shared", shared)
	}
}

// same compares two loops but for what only reading needs.
func same(t *testing.T, path string, a, b *Loop) {
	t.Helper()
	x, y := *a, *b
	x.open, y.open = nil, nil
	if !reflect.DeepEqual(x, y) {
		t.Errorf("%s at %s s: the shared loop differs from the file read again", path, a.Timing.Period.FloatString(9))
	}
}

func BenchmarkWithRate(b *testing.B) {
	l, problems := Load("../cmd/steadytick/starters/rotary.yaml")
	if len(problems) > 0 {
		b.Fatal(problems)
	}
	period := big.NewRat(1, 777)
	for b.Loop() {
		if _, problems := l.WithRate(period); len(problems) > 0 {
			b.Fatal(problems)
		}
	}
}
