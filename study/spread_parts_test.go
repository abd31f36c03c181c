package study

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"reflect"
	"runtime"
	"strings"
	"testing"

	"steadytick/loop"
)

// partOf runs a part and returns it as a file in memory.
func partOf(t testing.TB, l *loop.Loop, o SpreadOptions, p SpreadPart) string {
	t.Helper()
	var b bytes.Buffer
	if _, err := RunSpreadPart(context.Background(), l, o, p, &b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// inMemory is a part file whose text is given.
func inMemory(name, text string) (PartFile, error) {
	return ReadPart(name, func() (io.ReadCloser, error) { return io.NopCloser(strings.NewReader(text)), nil })
}

func merged1(l *loop.Loop, o SpreadOptions, texts ...string) (*Spread, error) {
	var files []PartFile
	for i, text := range texts {
		f, err := inMemory(fmt.Sprintf("part%d", i+1), text)
		if err != nil {
			return nil, err
		}
		files = append(files, f)
	}
	return MergeSpread(context.Background(), l, files, o)
}

// Parts of uneven length, merged in another order, give the result of one run in every field, and its lines to the byte.
func TestSpreadPartsMerge(t *testing.T) {
	l := parsed(t, wide)
	for _, o := range []SpreadOptions{
		{Trials: 100, Seed: 4, Curves: true, Version: "x"},
		{Draw: DrawNormal, Trials: 301, Seed: math.MaxUint64, Simulate: true, Version: "x"},
		{Draw: DrawCorners, Version: "x"},
	} {
		var one, joined bytes.Buffer
		whole := o
		whole.Rows = &one
		want := spreadOf(t, l, whole)
		texts := make([]string, 3)
		for i := range texts {
			texts[i] = partOf(t, l, o, SpreadPart{i + 1, 3})
		}
		got, err := merged1(l, SpreadOptions{Curves: o.Curves, Version: "x", Rows: &joined}, texts[2], texts[0], texts[1])
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%s: merged\n%+v\none run\n%+v", o.Draw, got, want)
		}
		a, err1 := json.Marshal(got)
		b, err2 := json.Marshal(want)
		if err1 != nil || err2 != nil || !bytes.Equal(a, b) {
			t.Errorf("%s: the JSON differs", o.Draw)
		}
		if joined.String() != one.String() {
			t.Errorf("%s: the lines differ", o.Draw)
		}
	}
}

// The spans of parts follow each other, leave nothing out, and differ by one trial at most.
func TestSpreadPartSpans(t *testing.T) {
	for _, trials := range []int64{1, 2, 10, 999, 1000, MostTrials} {
		for _, n := range []int{1, 2, 3, 7, 1000} {
			if int64(n) > trials {
				continue
			}
			next := int64(1)
			for i := range n {
				first, last := SpreadPart{i + 1, n}.span(trials)
				if size := last - first + 1; first != next || size < trials/int64(n) || size > trials/int64(n)+1 {
					t.Fatalf("part %d/%d of %d: %d to %d", i+1, n, trials, first, last)
				}
				next = last + 1
			}
			if next != trials+1 {
				t.Errorf("%d parts of %d trials end at %d", n, trials, next-1)
			}
		}
	}
	for _, bad := range []string{"", "3", "5/3", "0/3", "-1/3", "1/0", "a/b", "1/3/5", "1/1000000000"} {
		if _, err := ParseSpreadPart(bad); err == nil || !strings.Contains(err.Error(), "1/3, 2/3 and 3/3") {
			t.Errorf("%q: %v", bad, err)
		}
	}
	if p, err := ParseSpreadPart(" 2/5 "); err != nil || p != (SpreadPart{2, 5}) {
		t.Errorf("%v %v", p, err)
	}
}

// What does not belong together is refused, and the message names it.
func TestSpreadPartsThatDoNotFit(t *testing.T) {
	l := parsed(t, wide)
	o := SpreadOptions{Trials: 9, Seed: 4, Version: "x"}
	part := func(i, n int) string { return partOf(t, l, o, SpreadPart{i, n}) }
	a, b, c := part(1, 3), part(2, 3), part(3, 3)
	seed, draw := o, o
	seed.Seed, draw.Draw = 5, DrawNormal
	line := func(text string, n int) string { return strings.SplitAfter(text, "\n")[n-1] }
	merge := SpreadOptions{Version: "x"}
	other := parsed(t, strings.Replace(wide, "9.2*", "9.3*", 1))
	for _, x := range []struct {
		name  string
		loop  *loop.Loop
		texts []string
		want  string
	}{
		{"one missing", l, []string{c, a}, "1 of 3 parts are missing: 2/3"},
		{"two missing", l, []string{b}, "2 of 3 parts are missing: 1/3, 3/3"},
		{"one twice", l, []string{a, b, c, b}, "part 2/3 is there twice: part2 and part4"},
		{"another seed", l, []string{a, partOf(t, l, seed, SpreadPart{2, 3}), c}, "part1 and part2 are parts of different studies: seed is 4 in the first and 5 in the second"},
		{"another draw", l, []string{a, b, partOf(t, l, draw, SpreadPart{3, 3})}, "part1 and part3 are parts of different studies: draw"},
		{"another split", l, []string{a, b, part(3, 4)}, "parts is 3 in the first and 4 in the second"},
		{"another loop in a part", l, []string{a, partOf(t, other, o, SpreadPart{2, 3}), c}, "the loop files, or files that they name, are not the same"},
		{"another loop file", other, []string{a, b, c}, "is not the loop file of the parts"},
		{"cut off at a line", l, []string{a, strings.TrimSuffix(b, line(b, 5)), c}, "part2:5: the file ends here, before its last line"},
		{"cut off in a line", l, []string{a, b, c[:len(c)-7]}, "part3:5: the file ends here"},
		{"cut off in the trials", l, []string{a, b, c[:len(c)-300]}, "part3:4: the file ends here"},
		{"a digit changed", l, []string{a, strings.Replace(b, `"phase_margin":6`, `"phase_margin":7`, 1), c}, "part2: its checksum is wrong"},
		{"a line out", l, []string{a, strings.Replace(b, line(b, 3), "", 1), c}, "part2:3: trial 6 stands where trial 5 belongs"},
		{"lines turned", l, []string{strings.Replace(strings.Replace(a, line(a, 2), "", 1), line(a, 3), line(a, 3)+line(a, 2), 1), b, c}, "part1:2: trial 2 stands where trial 1 belongs"},
		{"no JSON", l, []string{a, strings.Replace(b, `{"trial":5`, `{"trial":5,`+"\x00", 1), c}, "part2:3: "},
		{"another key", l, []string{a, strings.Replace(b, `"stable"`, `"sturdy"`, 1), c}, "part2:2: "},
		{"a metric out", l, []string{a, strings.Replace(b, `"gain_margin":`, `"gain_marvel":`, 1), c}, "part2:2: the metric gain_margin is missing"},
		{"an endless number", l, []string{a, strings.Replace(b, `"decay_per_s":`, `"decay_per_s":1e999`, 1), c}, "part2:2: "},
		{"more after the end", l, []string{a, b + "{}\n", c}, "part2:6: there is more after the last line"},
		{"no header", l, []string{a, strings.Replace(b, line(b, 1), "", 1), c}, "part2:1: this is no part of a spread"},
		{"a header of nonsense", l, []string{a, strings.Replace(b, `"part":[2,3]`, `"part":[5,3]`, 1), c}, "part2:1: the header makes no sense: part 5/3 of 9 trials"},
		{"spans of nonsense", l, []string{a, strings.Replace(b, `"first_trial":4`, `"first_trial":3`, 1), c}, "part2:1: the header makes no sense: part 2/3 of 9 trials has the trials 4 to 6, not 3 to 6"},
		{"nothing", l, []string{a, "", c}, "part2:1: the file ends here"},
		{"no parts", l, nil, "no parts to merge"},
	} {
		r, err := merged1(x.loop, merge, x.texts...)
		if r != nil || err == nil || !strings.Contains(err.Error(), x.want) {
			t.Errorf("%s: %v\nwant %s", x.name, err, x.want)
		}
	}
	if _, err := merged1(l, SpreadOptions{Version: "y"}, a, b, c); err == nil || !strings.Contains(err.Error(), "written by version x, this is y") {
		t.Errorf("another version: %v", err)
	}
	if _, err := merged1(l, merge, a, b, c); err != nil {
		t.Errorf("the parts as written: %v", err)
	}
	if _, err := RunSpreadPart(context.Background(), l, o, SpreadPart{1, 10}, io.Discard); err == nil || !strings.Contains(err.Error(), "10 parts of 9 trials") {
		t.Errorf("more parts than trials: %v", err)
	}
}

// A part whose trials were drawn in another way is foreign even when its checksum is right.
func TestSpreadPartOfAnotherDraw(t *testing.T) {
	l := parsed(t, wide)
	foreign := partOf(t, l, SpreadOptions{Trials: 9, Seed: 5}, SpreadPart{1, 1})
	f, err := inMemory("foreign", strings.Replace(foreign, `"seed":5`, `"seed":4`, 1))
	if err != nil {
		t.Fatal(err)
	}
	_, err = MergeSpread(context.Background(), l, []PartFile{f}, SpreadOptions{})
	if err == nil || !strings.Contains(err.Error(), "trial 1 of seed 4 has other symbols") {
		t.Error(err)
	}
}

// The loop with an input file is told apart by the rows of that file.
func TestSpreadHashSeesInputFiles(t *testing.T) {
	read := func(rows string) *loop.Loop {
		l, problems := loop.Parse("x.yaml", []byte(strings.Replace(wide, "ramp: 2]", "ramp: 2, file: ref.csv]", 1)), func(string) ([]byte, error) { return []byte("t_s,r\n" + rows), nil })
		if len(problems) > 0 {
			t.Fatal(problems)
		}
		return l
	}
	a, b, c := loopHash(read("0,0\n1,1\n"), "", ""), loopHash(read("0,0\n1,1.0\n"), "", ""), loopHash(read("0,0\n1,2\n"), "", "")
	if a != b || a == c || a == loopHash(read("0,0\n1,1\n"), "4 kHz", "") {
		t.Error(a, b, c)
	}
}

// The live memory does not grow with the trials: between a tenth and the end of a run there is room for the bins of rare values only, a
// page of 10 kB for each halving of the distance from the nominal figure in each of 9 metrics and on both sides, 3 more at ten times
// the trials; a row takes some 500 bytes, 9 MB for 18 000 of them.
func TestSpreadMemoryIsConstant(t *testing.T) {
	l := integratorLoop(t, "50 %", "0.1 s", "phase_margin >= 45 deg")
	live := func() uint64 {
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		return m.HeapAlloc
	}
	const n = 20_000
	var early, late uint64
	o := SpreadOptions{Trials: n, Seed: 1, Rows: io.Discard, Progress: func(what string, done, _ int) {
		switch {
		case what != "trials":
		case done >= n/10 && early == 0:
			early = live()
		case done == n:
			late = live()
		}
	}}
	spreadOf(t, l, o)
	if early == 0 || late == 0 || late > early+9*2*3*12_000+500_000 { // half a megabyte of what the runtime keeps for itself
		t.Errorf("%d bytes live after %d trials, %d after %d", early, n/10, late, n)
	}
}
