package loop

import (
	"math/big"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

// whatMaps are maps as --map has them, wrongMaps what it refuses.
var (
	whatMaps = []string{"tustin", "prewarped", "prewarped at 0.01 Hz", "prewarped at 40 Hz", "prewarped at 1 MHz", "matched", "forward", "backward",
		"hold", "triangle", ""}
	wrongMaps = []string{" hold ", " ", "tustn", "tustin at 3 Hz", "prewarped at 3", "prewarped at -1 Hz"}
)

var whatFactors = []*big.Rat{big.NewRat(1, 1), big.NewRat(13, 10), big.NewRat(1, 7), big.NewRat(1, 1000), big.NewRat(50, 1), big.NewRat(20_000, 1),
	new(big.Rat), big.NewRat(-1, 2), big.NewRat(1, 1_000_000_000), big.NewRat(1_000_000_000_000, 1)}

// everyLoop are the good files of the tests, the starter files and the examples.
func everyLoop(t testing.TB) []*Loop {
	t.Helper()
	var out []*Loop
	for _, pattern := range []string{"testdata/good/*.yaml", "../cmd/steadytick/starters/*.yaml", "../testdata/loops/*.yaml"} {
		paths, err := filepath.Glob(pattern)
		if err != nil || len(paths) == 0 {
			t.Fatalf("no files for %s", pattern)
		}
		for _, path := range paths {
			l, problems := Load(path)
			if len(problems) > 0 {
				t.Fatal(problems)
			}
			out = append(out, l)
		}
	}
	return out
}

// agree compares a loop with the file read again with the same options: the same loop in every field, or the same messages.
func agree(t *testing.T, what string, l *Loop, o Options, got *Loop, problems Problems) {
	t.Helper()
	want, refused := ParseWith(l.File, l.Source, l.open, o)
	if problems.Error() != refused.Error() || (got == nil) != (want == nil) {
		t.Errorf("%s, %s: %v\nread again: %v", l.File, what, problems, refused)
		return
	}
	if got == nil {
		return
	}
	x, y := *got, *want
	x.open, y.open = nil, nil // functions cannot be compared
	if !reflect.DeepEqual(x, y) {
		t.Errorf("%s, %s: differs from the file read again:\n%+v\n%+v", l.File, what, x, y)
	}
}

// A loop at another rate or with another map is what reading the file again gives, in every order of the two, for every file.
func TestWithRateAndMapAgree(t *testing.T) {
	for _, l := range everyLoop(t) {
		t.Run(filepath.Base(l.File), func(t *testing.T) { agreeEverywhere(t, l) })
	}
}

func agreeEverywhere(t *testing.T, l *Loop) {
	for _, m := range append(wrongMaps, whatMaps...) {
		with, problems := l.WithMap(m)
		agree(t, "map "+m, l, Options{Map: m}, with, problems)
		if with != nil { // at the frequency of the file, when it has one
			back, problems := with.WithMap("prewarped")
			agree(t, "map "+m+", then prewarped", l, Options{Map: "prewarped"}, back, problems)
		}
	}
	for _, factor := range whatFactors {
		period := new(big.Rat).Mul(l.Timing.Period, factor)
		at, problems := l.WithRate(period)
		agree(t, "rate × "+factor.String(), l, Options{Period: period}, at, problems)
		for _, m := range whatMaps {
			o, both := Options{Period: period, Map: m}, "rate × "+factor.String()+" and map "+m
			if at != nil {
				other, problems := at.WithMap(m)
				agree(t, both, l, o, other, problems)
			}
			if with, _ := l.WithMap(m); with != nil {
				other, problems := with.WithRate(period)
				agree(t, both, l, o, other, problems)
			}
		}
	}
}

// The shapes that share least: each is read at 100 Hz.
func TestWithRateAndMapShapes(t *testing.T) {
	for _, text := range []string{
		"  model: (s + 1)/s\n  map: prewarped\n  at: 40 Hz\n",
		"  model: 2\n",
		"  model: 2\n  map: prewarped\n  at: 40 Hz\n",
		"  model: 0.1(z - 1)z^-2\n",
		"  model: (s + 1)/s\n  map: hold\n  prefilter: {model: 0.2/(z - 0.8)}\n",
		"  model: (s + 1)/s\n  map: hold\n  feedforward: {model: s/(s + 1), map: prewarped, at: 30 Hz}\n",
		"  pid: {form: parallel, Kp: 2}\n",
		"  pid: {form: parallel, Kp: 2, Ki: 0.05, Kd: 3, filter: 1 ms, stored: with_period, map: {i: prewarped, d: backward}, at: 40 Hz}\n",
		"  pid: {form: series, Kp: 2, Ti: 1 s, Td: 10 ms, filter: 10 ms, derivative_on: measurement, map: {i: forward, d: prewarped}, at: 40 Hz}\n",
		"  pid: {form: series, Kp: 2, Ti: 1 s, Td: 10 ms, filter: 1 ms, setpoint_weight: 0.5, map: prewarped, at: 40 Hz}\n",
		"  pid: {form: standard, K: 2, Ti: 1 s, Td: 10 ms, filter_ratio: 8, map: triangle}\n",
	} {
		agreeEverywhere(t, mustParse(t, withController(text)))
	}
	// Plant and sensor answer at once: hold and forward can run, the others are algebraic loops.
	direct := strings.Replace(withController("  model: 3/(s + 1)\n  map: hold\n"), "model: 1/(s+1)", "model: (s+2)/(s+1)", 1)
	l := mustParse(t, direct)
	if _, problems := l.WithMap("tustin"); len(problems) != 1 || !strings.Contains(problems[0].Message, "algebraic loop") {
		t.Errorf("the loop is not refused: %v", problems)
	}
	agreeEverywhere(t, l)
}

// What nothing stands against is shared and not read again.
func TestSharing(t *testing.T) {
	for text, want := range map[string][2]bool{
		"  model: (s + 1)/s\n  map: hold\n":                                               {true, true},
		"  model: 0.1(z - 1)z^-2\n":                                                       {false, false},
		"  pid: {form: parallel, Kp: 2, Ki: 1, stored: with_period, map: tustin}\n":       {false, true},
		"  model: (s + 1)/s\n  map: hold\n  prefilter: {model: 0.2/(z - 0.8)}\n":          {false, true},
		"  pid: {form: standard, K: 2, Ti: 1 s, Td: 10 ms, filter_ratio: 8, map: hold}\n": {true, true},
	} {
		l := mustParse(t, withController(text))
		if got := [2]bool{l.sharing(rat("1/200")) != nil, l.mapped("backward") != nil}; got != want {
			t.Errorf("%sshared at another rate, with another map: %v, want %v", text, got, want)
		}
	}
	for _, l := range everyLoop(t) {
		before := *l
		before.Controller.Terms = cloneTerms(l.Controller.Terms)
		l.WithMap("backward")
		l.WithRate(new(big.Rat).Mul(l.Timing.Period, big.NewRat(9, 10)))
		if before.open, l.open = nil, nil; !reflect.DeepEqual(before, *l) {
			t.Errorf("%s was changed", l.File)
		}
	}
}

// With another map the frequency of the file serves nobody and limits no rate.
func TestPrewarpFrequencyUnused(t *testing.T) {
	l := mustParse(t, withController("  model: (s + 1)/s\n  map: prewarped\n  at: 40 Hz\n"))
	slow := rat("1/50")
	if _, problems := l.WithRate(slow); len(problems) != 1 || !strings.Contains(problems[0].Message, "half the sample rate") {
		t.Errorf("prewarped at 40 Hz in a loop at 50 Hz: %v", problems)
	}
	m, problems := l.WithMap("tustin")
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	if m, problems = m.WithRate(slow); len(problems) > 0 {
		t.Fatal(problems)
	}
	if _, problems := m.WithMap("prewarped"); len(problems) != 1 || !strings.Contains(problems[0].Message, "half the sample rate") {
		t.Errorf("back to prewarped at 50 Hz: %v", problems)
	}
}

func BenchmarkWithRate(b *testing.B) {
	l, problems := Load("../cmd/steadytick/starters/rotary.yaml")
	if len(problems) > 0 {
		b.Fatal(problems)
	}
	period := big.NewRat(1, 777)
	b.Run("shared", func(b *testing.B) {
		for b.Loop() {
			if _, problems := l.WithRate(period); len(problems) > 0 {
				b.Fatal(problems)
			}
		}
	})
	b.Run("read", func(b *testing.B) {
		for b.Loop() {
			if _, problems := ParseWith(l.File, l.Source, l.open, Options{Period: period}); len(problems) > 0 {
				b.Fatal(problems)
			}
		}
	})
}

func BenchmarkWithMap(b *testing.B) {
	l, problems := Load("../cmd/steadytick/starters/rotary.yaml")
	if len(problems) > 0 {
		b.Fatal(problems)
	}
	b.Run("shared", func(b *testing.B) {
		for b.Loop() {
			if _, problems := l.WithMap("matched"); len(problems) > 0 {
				b.Fatal(problems)
			}
		}
	})
	b.Run("read", func(b *testing.B) {
		for b.Loop() {
			if _, problems := ParseWith(l.File, l.Source, l.open, Options{Map: "matched"}); len(problems) > 0 {
				b.Fatal(problems)
			}
		}
	})
}
