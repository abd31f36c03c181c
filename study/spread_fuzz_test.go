package study

import (
	"context"
	"fmt"
	"strings"
	"testing"
)

// A part file with any text in it is refused or gives what the part as written gives: nothing panics, and no other result comes of it.
func FuzzSpreadParts(f *testing.F) {
	l := parsed(f, fmt.Sprintf(integrator, "50 %", "0.1 s", ""))
	whole := partOf(f, l, SpreadOptions{Trials: 3, Seed: 1}, SpreadPart{1, 1})
	want, err := merged1(l, SpreadOptions{}, whole)
	if err != nil {
		f.Fatal(err)
	}
	f.Add(whole)
	f.Add(whole[:len(whole)/2])
	f.Add(strings.Replace(whole, `"trials":3`, `"trials":100000000`, 1))
	f.Add(strings.Replace(whole, `"part":[1,1]`, `"part":[0,0]`, 1))
	f.Add(strings.Replace(whole, `"stable":true`, `"failed":"x"`, 2))
	f.Add(strings.Replace(whole, `"draw":"uniform"`, `"draw":"corners"`, 1))
	f.Add(strings.Replace(whole, `"draw":"uniform"`, `"draw":""`, 1))
	f.Add(strings.Replace(whole, `null`, `"inf"`, 1))
	f.Fuzz(func(t *testing.T, text string) {
		file, err := inMemory("fuzz", text)
		if err != nil {
			return
		}
		got, err := MergeSpread(context.Background(), l, []PartFile{file}, SpreadOptions{})
		if err != nil {
			return
		}
		if got.Verdict != want.Verdict || got.Trials != want.Trials || got.Yield.Counted.Met != want.Yield.Counted.Met {
			t.Errorf("another result: %+v", got)
		}
	})
}
