package loop

import (
	"math/big"
	"reflect"
	"strings"
	"sync"
	"testing"
)

// The same loop with other symbols is what reading the file again with them gives, in every field, for every file that has symbols, also when
// many are made at the same time; and the loop itself stays as it was.
func TestWithSymbolsAgrees(t *testing.T) {
	factors := []*big.Rat{big.NewRat(1, 1), big.NewRat(8, 10), big.NewRat(1234567, 1000000), big.NewRat(-1, 1), new(big.Rat)}
	some := 0
	for _, l := range everyLoop(t) {
		before := *l
		before.Controller.Terms = cloneTerms(l.Controller.Terms)
		var group sync.WaitGroup
		for _, s := range l.Symbols {
			for _, f := range factors {
				some++
				values := map[string]*big.Rat{s.Name: new(big.Rat).Mul(s.Value, f)}
				group.Go(func() {
					got, problems := l.WithSymbols(values)
					agree(t, s.Name+" × "+f.String(), l, Options{Symbols: values}, got, problems)
					if got == nil {
						return
					}
					period := new(big.Rat).Mul(l.Timing.Period, big.NewRat(9, 10))
					other, problems := got.WithRate(period)
					agree(t, s.Name+" at another rate", l, Options{Symbols: values, Period: period}, other, problems)
				})
			}
		}
		group.Wait()
		if before.open, l.open = nil, nil; !reflect.DeepEqual(before, *l) {
			t.Errorf("%s was changed", l.File)
		}
	}
	if some < 50 {
		t.Errorf("only %d symbols tried", some)
	}
}

const computed = `loop: computed
symbols:
  J: {value: 0.02, spread: 20 %}
  b: 0.18
  w: {value: b/J, spread: 10 %}
  K: w^2
plant: {model: K/(s*(s + w))}
controller: {model: 1}
timing: {rate: 100 Hz}
requirements: [phase_margin >= 10 deg]
`

// What is computed from a symbol follows it: b/J with J = 0.01 is 18, and K its square.
func TestSymbolsFollow(t *testing.T) {
	l := mustParse(t, computed)
	got, problems := l.WithSymbols(map[string]*big.Rat{"J": rat("1/100")})
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	for i, want := range []string{"1/100", "9/50", "18", "324"} {
		if got.Symbols[i].Value.Cmp(rat(want)) != 0 {
			t.Errorf("%s is %v, want %s", got.Symbols[i].Name, got.Symbols[i].Value, want)
		}
	}
	if got.Plant.Ratio.Gain.Cmp(l.Plant.Ratio.Gain) == 0 {
		t.Error("the plant did not follow")
	}
	// Drawn one after another: J is halved, w = b/J = 18 is then a tenth above, K = 19.8² follows.
	seen := ""
	list, problems := l.DrawSymbols(func(s Symbol) *big.Rat {
		seen += s.Name + " "
		switch s.Name {
		case "J":
			return rat("1/100")
		case "w":
			return new(big.Rat).Mul(s.Value, rat("11/10"))
		}
		return nil
	})
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	if seen != "J b w K " {
		t.Errorf("drawn in the order %s", seen)
	}
	for i, want := range []string{"1/100", "9/50", "99/5", "9801/25"} {
		if list[i].Value.Cmp(rat(want)) != 0 {
			t.Errorf("drawn: %s is %v, want %s", list[i].Name, list[i].Value, want)
		}
	}
	if list[0].Spread.Cmp(rat("1/5")) != 0 || list[3].Spread != nil {
		t.Error("the spreads are lost")
	}
}

// What cannot be is refused with the place where it goes wrong.
func TestWithSymbolsRefuses(t *testing.T) {
	l := mustParse(t, computed)
	for _, c := range []struct {
		name, value, want string
		line              int
	}{
		{"J", "0", "division by zero", 5},
		{"Jj", "1", "which is no symbol of the file", 0},
		{"b", "1e300", "outside the range of numbers", 4},
	} {
		v, _ := new(big.Rat).SetString(c.value)
		got, problems := l.WithSymbols(map[string]*big.Rat{c.name: v})
		if got != nil || len(problems) == 0 || !strings.Contains(problems[0].Message, c.want) || problems[0].Line != c.line {
			t.Errorf("%s = %s: %v", c.name, c.value, problems)
		}
		if c.line > 0 && len(problems) > 0 && !strings.Contains(problems[0].LineText, ":") {
			t.Errorf("%s: the line is not shown: %+v", c.name, problems[0])
		}
	}
}

// Input files are read once.
func TestWithSymbolsKeepsInputFiles(t *testing.T) {
	opened := 0
	open := func(string) ([]byte, error) { opened++; return []byte("t_s,r\n0,0\n1,2\n"), nil }
	l, problems := Parse("x.yaml", []byte(computed+"inputs: [file: ref.csv]\n"), open)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	got, problems := l.WithSymbols(map[string]*big.Rat{"J": rat("1/90")})
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	if opened != 1 || &got.Inputs[0].Times[0] != &l.Inputs[0].Times[0] {
		t.Errorf("the input file was opened %d times", opened)
	}
}

func BenchmarkWithSymbols(b *testing.B) {
	for _, name := range []string{"rotary", "converter", "stage"} {
		l, problems := Load("../cmd/steadytick/starters/" + name + ".yaml")
		if len(problems) > 0 {
			b.Fatal(problems)
		}
		values := map[string]*big.Rat{}
		for i, s := range l.Symbols {
			if s.Spread != nil {
				values[s.Name] = new(big.Rat).Mul(s.Value, big.NewRat(100000000003+int64(i), 100000000000))
			}
		}
		b.Run(name+"/kept", func(b *testing.B) {
			for b.Loop() {
				if _, problems := l.WithSymbols(values); len(problems) > 0 {
					b.Fatal(problems)
				}
			}
		})
		b.Run(name+"/read", func(b *testing.B) {
			for b.Loop() {
				if _, problems := ParseWith(l.File, l.Source, l.open, Options{Symbols: values}); len(problems) > 0 {
					b.Fatal(problems)
				}
			}
		})
	}
}
