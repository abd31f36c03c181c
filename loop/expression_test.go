package loop

import (
	"math/big"
	"strings"
	"testing"

	"steadytick/internal/exact"
)

func evalText(t *testing.T, text string, symbols map[string]*big.Rat) result {
	t.Helper()
	e, err := parseExpression(text)
	if err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	ev := &evaluator{symbols: symbols}
	if _, errs := ev.names(e); len(errs) > 0 {
		t.Fatalf("%s: %v", text, errs[0])
	}
	v, err := ev.eval(e)
	if err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	return v
}

// How an expression is read, shown by printing it with every product written out. The
// rules are those of doc.go.
func TestReading(t *testing.T) {
	for text, want := range map[string]string{
		"2s":                     "2*s",
		"2s(s+1)":                "2*s*(s+1)",
		"K(s+1)":                 "K*(s+1)",
		"(s+1)(s+2)":             "(s+1)*(s+2)",
		"(s+1)s":                 "(s+1)*s",
		"s(s+1)":                 "s*(s+1)",
		"pi(s+1)":                "pi*(s+1)",
		"2 s":                    "2*s",
		"s^2(s+1)":               "s^2*(s+1)",
		"2s^2":                   "2*s^2",
		"-s^2":                   "-s^2",
		"(-s)^2":                 "(-s)^2",
		"-2s":                    "-(2*s)",
		"-2*s":                   "-2*s",
		"2*-s":                   "2*(-s)",
		"+3":                     "3",
		"s^-1":                   "s^-1",
		"s^(-1)":                 "s^-1",
		"s^(1+1)":                "s^(1+1)",
		"a-b-c":                  "a-b-c",
		"a-(b-c)":                "a-(b-c)",
		"a/b/c":                  "a/b/c",
		"a/(b/c)":                "a/(b/c)",
		"a/b*c":                  "a/b*c",
		"1/2*3s":                 "1/2*(3*s)",
		"2s/3":                   "2*s/3",
		"(1/2)s":                 "1/2*s",
		"exp(-0.01s)":            "exp(-(0.01*s))",
		"sqrt(2)(s+1)":           "sqrt(2)*(s+1)",
		"1e3s":                   "1e3*s",
		"2es":                    "", // the symbol es
		".5z^-2":                 ".5*z^-2",
		"((s))":                  "s",
		"4.2*(0.21*s + 1)/(s+3)": "4.2*(0.21*s+1)/(s+3)",
	} {
		e, err := parseExpression(text)
		if want == "" {
			if err == nil {
				t.Errorf("%s is read as %s", text, e)
			}
			continue
		}
		if err != nil {
			t.Errorf("%s: %v", text, err)
		} else if e.String() != want {
			t.Errorf("%s is read as %s, want %s", text, e, want)
		}
	}
}

// Every division whose divisor is a product without * is refused.
func TestAmbiguousDivisions(t *testing.T) {
	for _, text := range []string{"1/2s", "1/s(s+1)", "K/(s+1)(s+2)", "1/2s^2", "1/s^2(s+1)", "1/-2s", "a*b/2s", "1/(s+1)s", "1/2(3)", "2/3z", "1/exp(-s)(s)"} {
		if e, err := parseExpression(text); err == nil {
			t.Errorf("%s is read as %s", text, e)
		} else if !strings.Contains(err.message, "two ways") {
			t.Errorf("%s: %s", text, err.message)
		}
	}
}

// Decimals are exact: 0.1 is 1/10, and the sum [1, -1.8, 0.8] is zero (design values).
func TestExactDecimals(t *testing.T) {
	for text, want := range map[string]string{
		"0.1": "1/10", "1 - 1.8 + 0.8": "0", "4.7e-6": "47/10000000", "1e2": "100", "5.": "5", ".25": "1/4",
		"2^-3": "1/8", "(-2)^3": "-8", "-2^2": "-4", "sqrt(9/16)": "3/4", "sqrt(0)": "0", "2^0": "1", "0^0": "1",
		"exp(-0*s)": "1", "1e300/1e300": "1",
	} {
		if v := evalText(t, text, nil); v.c == nil || v.c.Cmp(rat(want)) != 0 {
			t.Errorf("%s = %v, want %s", text, v.c, want)
		}
	}
}

// pi by Machin's formula, pi = 16·atan(1/5) − 4·atan(1/239) (1706), the alternating
// series cut when a term is below 1e-90.
func TestPi(t *testing.T) {
	atan := func(n int64) *big.Rat {
		sum, power := new(big.Rat), big.NewRat(1, n)
		for k := int64(0); k < 140; k++ {
			term := new(big.Rat).Mul(power, big.NewRat(1-2*(k%2), 2*k+1))
			sum.Add(sum, term)
			power.Mul(power, big.NewRat(1, n*n))
		}
		return sum
	}
	want := new(big.Rat).Mul(big.NewRat(16, 1), atan(5))
	want.Sub(want, new(big.Rat).Mul(big.NewRat(4, 1), atan(239)))
	diff := new(big.Rat).Sub(evalText(t, "pi", nil).c, want)
	// 69 decimals are written, rounded: the error is at most half a unit of the last.
	if !(diff.Abs(diff).Cmp(rat("0.5e-69")) <= 0) {
		t.Errorf("pi is off by %s", diff.FloatString(80))
	}
}

// An irrational root squared is the radicand to 60 digits, over the whole range of sizes.
func TestSqrt(t *testing.T) {
	for _, text := range []string{"2", "3", "1e-200", "2e-199", "7e199", "0.5", "123456789.123456789", "pi", "1/3", "99999999999999999999"} {
		v := evalText(t, text, nil).c
		r := evalText(t, "sqrt("+text+")", nil).c
		rel := new(big.Rat).Quo(new(big.Rat).Mul(r, r), v)
		rel.Sub(rel, big.NewRat(1, 1))
		if !(rel.Abs(rel).Cmp(power10(-60)) <= 0) {
			t.Errorf("sqrt(%s)² is off by %s relative", text, rel.FloatString(70))
		}
	}
	// √2 to 60 decimals, a published constant (OEIS A002193; from memory).
	want := rat("1.414213562373095048801688724209698078569671875376948073176680")
	diff := new(big.Rat).Sub(evalText(t, "sqrt(2)", nil).c, want)
	if !(diff.Abs(diff).Cmp(power10(-60)) <= 0) { // the last decimal written is the 60th
		t.Errorf("sqrt(2) is off by %s", diff.FloatString(70))
	}
}

func equalModels(a, b exact.Ratio) bool {
	return a.NumPoly().Mul(b.DenPoly()).Equal(b.NumPoly().Mul(a.DenPoly()))
}

// One plant in every form: 3(s + 2)/((s + 1)((s + 1)² + 4)) by expansion,
// (3s + 6)/(s³ + 3s² + 7s + 5), and its controllable companion form.
func TestForms(t *testing.T) {
	read := func(model string) exact.Ratio {
		l := mustParse(t, "loop: forms\nplant: {model: "+model+"}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz}\n")
		return l.Plant.Ratio
	}
	want := read("3(s + 2)/((s + 1)((s + 1)^2 + 4))")
	for _, model := range []string{
		"{num: [3, 6], den: [1, 3, 7, 5]}",
		"{num: [0, 0, 3, 6], den: [0, 1, 3, 7, 5]}",
		"{num: [6, 12], den: [2, 6, 14, 10], variable: s}",
		"{zeros: [-2], poles: [-1, [-1, 2], [-1, -2]], gain: 3}",
		"{A: [[0, 1, 0], [0, 0, 1], [-5, -7, -3]], B: [0, 0, 1], C: [6, 3, 0], D: 0}",
		"{A: [[0, 1, 0], [0, 0, 1], [-5, -7, -3]], B: [[0], [0], [1]], C: [[6, 3, 0]], D: [[0]]}",
		"1/(s+1) * (3s + 6)/(s^2 + 2s + 5)",
		"(3*s^-2 + 6s^-3)/(1 + 3s^-1 + 7s^-2 + 5s^-3)",
	} {
		if got := read(model); !equalModels(got, want) {
			t.Errorf("%s is %v / %v", model, got.NumPoly(), got.DenPoly())
		}
	}
}

// Dead times add up: exp() in the model and dead_time beside it.
func TestDeadTime(t *testing.T) {
	l := mustParse(t, "loop: dead time\nplant: {model: exp(-0.01s)/(s+1)*exp(-(2/1000)*s), dead_time: 3 ms}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz}\n")
	if l.Plant.Delay.Cmp(rat("0.015")) != 0 {
		t.Errorf("dead time %v", l.Plant.Delay)
	}
}
