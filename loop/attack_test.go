package loop

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

// slowest is how long reading one file may take on a slow machine with the race
// detector on; without both it is under a second.
const slowest = time.Minute

func withModel(model string) string {
	return "loop: attack\nplant: {model: 1/(s+1)}\ncontroller:\n  map: tustin\n  model: " + model + "\ntiming: {rate: 1 kHz}\n"
}

// Each text must give a plain message in bounded time.
func TestAttacks(t *testing.T) {
	re := strings.Repeat
	long := "1" + re("0123456789", 1000)
	var chain, factors, distinct strings.Builder
	for i := 1; i <= 800; i++ {
		fmt.Fprintf(&chain, "+1/(s+%d)", i)
	}
	for i := 1; i <= 400; i++ {
		fmt.Fprintf(&factors, "*(s+%d.5)/(s+%d.25)", i, i)
	}
	for i := 1; i <= 25; i++ {
		fmt.Fprintf(&distinct, "+%s/(%s*s+1)", re("7", 150+i%40), re("3", 120+i))
	}
	dense := func(n, from int, unit string) string {
		s := "(1"
		for k := 1; k <= n; k++ {
			s += fmt.Sprintf("+(%s/%d)*s^%d", unit, from+k, k)
		}
		return s + ")"
	}
	shared := func(n int, unit string) string {
		p, q, r := dense(n, 3, unit), dense(n, 70, unit), dense(n, 900, unit)
		return fmt.Sprintf("1/(%s*%s+1-1)+1/(%s*%s+1-1)", p, q, p, r)
	}
	for name, src := range map[string]string{
		"empty":             "",
		"only a comment":    "# nothing\n",
		"null":              "~",
		"nested brackets":   re("[", 10000),
		"nested braces":     "a: " + re("{a: ", 10000),
		"nested lists":      re("- ", 10000) + "a",
		"nested questions":  re("? ", 10000) + "a",
		"nested sections":   nestedSections(10000),
		"nested by one":     nestedSections(190),
		"parentheses":       withModel(re("(", 4000) + "1" + re(")", 4000)),
		"parentheses long":  withModel(re("(", 10000) + "1" + re(")", 10000)),
		"signs":             withModel(re("-", 9000) + "1"),
		"digits":            withModel(long),
		"digits behind":     withModel("0." + long),
		"digits underscore": withModel(re("1_000", 4000)),
		"digits few":        withModel(re("1234567890", 25)),
		"exponent":          withModel("1e" + long),
		"exponent digits":   withModel("1e" + re("9", 300)),
		"digits in time":    strings.Replace(withModel("2"), "1 kHz", re("9", 700)+" kHz", 1),
		"tower":             withModel("(((2^32)^32)^32)^32"),
		"tower of models":   withModel("(((s+1)^32)^32)^32"),
		"tower of negative": withModel("1/(((1/(s+1))^-32)^32)"),
		"tower of pi":       withModel("((pi^32)^32)^32"),
		"tower of roots":    withModel("sqrt(sqrt(2)^32 + 1)^32/(s+1)^64"),
		"sum of fractions":  withModel("0" + chain.String()),
		"product":           withModel("1" + factors.String()),
		"sum of long":       withModel("0" + distinct.String()),
		"sums of powers":    withModel(re("((s+pi)^2+", 6) + "1" + re(")^2", 6)),
		"large sums":        withModel("1/(" + dense(30, 3, "pi^8") + re("+1", 4000) + "+s^33)"),
		"large products":    withModel("1/(" + re("("+dense(14, 3, "pi^4")+"+1)*", 4) + dense(10, 3, "pi^4") + re("+1/"+dense(10, 5, "pi^4"), 9) + ")"),
		"shared factors 15": withModel("(s+1)*(" + shared(15, "pi") + ")"),
		"shared, long":      withModel("s^9*(" + shared(12, re("1234567890", 19)) + ")"),
		"chain of sums":     withModel("s^32*(" + re("(1/("+dense(9, 3, "pi")+"+", 14) + "1" + re("))", 14) + ")"),
		"sum of ones":       withModel("1/(s" + re("+1", 4900) + "+s^32)"),
		"joined":            withModel("1/s" + re("(s)", 3000)),
		"long text":         withModel(re("x", 60000)),
		"many keys":         re("a: 1\n", 12000),
		"many symbols":      "symbols:\n" + manySymbols(3500),
		"many entries":      withModel("{num: [" + re("1,", 30000) + "1], den: [1]}"),
		"many states":       withModel("{A: [" + re("[1],", 15000) + "[1]], B: [1], C: [1]}"),
		"large states":      withModel(denseStates(20, "1e300")),
		"too long":          re("#\n", 200000),
		"NUL":               "loop: \x00\n",
		"escape":            "loop: \x1b[31m\n",
		"delete":            "loop: \x7f\n",
		"invalid UTF-8":     "loop: \xff\xfe\n",
		"UTF-16":            "\xff\xfel\x00o\x00",
		"carriage return":   "loop: a\rplant: b\n",
		"line separator":    "loop: a\u2028plant: b\n",
		"anchors":           "a: &a [x]\nb: &b [*a, *a]\nc: &c [*b, *b]\n",
		"self alias":        "a: &a [*a]\n",
		"escaped control":   "loop: \"\\x00\\x1b\"\nplant: \"\\u0000\"\n",
		"quotes":            re("'", 60000),
		"colons":            re(": ", 30000),
		"dashes":            re("-\n", 30000),
		"documents":         re("---\n", 15000),
		"tags":              re("! ", 30000),
	} {
		t.Run(name, func(t *testing.T) {
			start := time.Now()
			l, problems := Parse("attack.yaml", []byte(src), nil)
			took := time.Since(start)
			if l != nil || len(problems) == 0 {
				t.Fatal("no problem reported")
			}
			text := problems.Error()
			if len(text) > 20000 {
				t.Errorf("the message is %d bytes long: %.200s", len(text), text)
			}
			if strings.ContainsFunc(text, func(c rune) bool { return c < ' ' && c != '\n' || c == 0x7f }) {
				t.Errorf("control characters in the message %q", text)
			}
			if took > slowest {
				t.Errorf("took %v", took)
			}
			t.Logf("%v\n%.600s", took, text)
		})
	}
}

func nestedSections(n int) string {
	var b strings.Builder
	for i := range n {
		if b.Len() > maxBytes-10000 {
			break
		}
		b.WriteString(strings.Repeat(" ", i) + "a:\n")
	}
	return b.String()
}

func manySymbols(n int) string {
	var b strings.Builder
	for i := range n {
		fmt.Fprintf(&b, "  a%d: %d*b\n", i, i)
	}
	return b.String()
}

func denseStates(n int, entry string) string {
	row := "[" + strings.Repeat(entry+",", n-1) + entry + "]"
	flat := strings.Repeat(",1", n)[1:]
	return "{A: [" + strings.Repeat(row+",", n-1) + row + "], B: [" + flat + "], C: [" + flat + "]}"
}

// A file of symbols that all use many others is read in bounded time too.
func TestWorkIsShared(t *testing.T) {
	var b strings.Builder
	b.WriteString("loop: work\nsymbols:\n")
	for i := range 200 {
		fmt.Fprintf(&b, "  a%d: (pi^15 + sqrt(%d.123456789))^1*1.%s\n", i, i, strings.Repeat("7", 150))
		fmt.Fprintf(&b, "  b%d: 1/(1 + a%d^2)/a%d\n", i, i, i)
	}
	b.WriteString("plant: {model: 1/(s+1)}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz}\n")
	start := time.Now()
	_, problems := Parse("work.yaml", []byte(b.String()), nil)
	if took := time.Since(start); took > slowest {
		t.Errorf("took %v", took)
	} else {
		t.Logf("%v, %d problems", took, len(problems))
	}
}
