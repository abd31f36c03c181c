package loop

import (
	"fmt"
	"math/big"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// anyExpr draws a tree that can be written: what parsing yields, and no more.
func anyExpr(depth int) *rapid.Generator[*expr] {
	return rapid.Custom(func(t *rapid.T) *expr {
		kinds := "00aa"
		if depth > 0 {
			kinds = "0a+-*/^mre"
		}
		kind := exprKind(kinds[rapid.IntRange(0, len(kinds)-1).Draw(t, "kind")])
		sub := func(what string) *expr { return anyExpr(depth-1).Draw(t, what) }
		switch kind {
		case exprNumber:
			text := rapid.SampledFrom([]string{"0", "1", "2", "0.5", "1e-3", "4.7E+2", ".25", "3.", "0010"}).Draw(t, "number")
			v, _ := exactNumber(text)
			return &expr{kind: kind, text: text, value: v}
		case exprName:
			return &expr{kind: kind, text: rapid.SampledFrom([]string{"s", "pi", "K", "e", "τ", "a_1", "s2"}).Draw(t, "name")}
		case exprMinus, exprSqrt, exprExp:
			return &expr{kind: kind, x: sub("x")}
		case exprPow:
			n := rapid.IntRange(0, 4).Draw(t, "power")
			y := &expr{kind: exprNumber, text: fmt.Sprint(n), value: big.NewRat(int64(n), 1)}
			if rapid.Bool().Draw(t, "negative") {
				y = &expr{kind: exprMinus, x: y}
			}
			if rapid.IntRange(0, 4).Draw(t, "odd exponent") == 0 {
				y = sub("exponent")
			}
			return &expr{kind: kind, x: sub("x"), y: y}
		}
		return &expr{kind: kind, x: sub("x"), y: sub("y")}
	})
}

// Printing and parsing is the identity on trees.
func TestPrintParse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e := anyExpr(5).Draw(t, "e")
		got, err := parseExpression(e.String())
		if err != nil {
			t.Fatalf("%s: %v", e, err)
		}
		if !got.same(e) {
			t.Fatalf("%s reads as %s", e, got)
		}
	})
}

// at1 computes an expression at s = x in rational numbers, a second way to the value. ok
// is false where it has none.
func (e *expr) at1(x *big.Rat, symbols map[string]*big.Rat) (v *big.Rat, ok bool) {
	switch e.kind {
	case exprNumber:
		return e.value, true
	case exprName:
		switch e.text {
		case "s":
			return x, true
		case "pi":
			return pi, true
		}
		v, ok = symbols[e.text]
		return v, ok
	case exprSqrt, exprExp:
		return nil, false
	}
	a, ok := e.x.at1(x, symbols)
	if !ok {
		return nil, false
	}
	if e.kind == exprMinus {
		return new(big.Rat).Neg(a), true
	}
	b, ok := e.y.at1(x, symbols)
	if !ok {
		return nil, false
	}
	v = new(big.Rat)
	switch e.kind {
	case exprAdd:
		v.Add(a, b)
	case exprSub:
		v.Sub(a, b)
	case exprMul:
		v.Mul(a, b)
	case exprDiv:
		if b.Sign() == 0 {
			return nil, false
		}
		v.Quo(a, b)
	case exprPow:
		if !b.IsInt() || b.Num().CmpAbs(big.NewInt(8)) > 0 || a.Sign() == 0 {
			return nil, false
		}
		v.SetInt64(1)
		for range new(big.Int).Abs(b.Num()).Int64() {
			v.Mul(v, a)
		}
		if b.Sign() < 0 {
			v.Inv(v)
		}
	}
	return v, bits(v) < 100000
}

// The function that an expression becomes has, at a point, the value that the expression
// has there when it is computed with rational numbers from the start.
func TestValueAtPoint(t *testing.T) {
	symbols := map[string]*big.Rat{"K": rat("4.2"), "e": rat("-1/3"), "τ": rat("0.004"), "a_1": rat("7"), "s2": rat("-2")}
	compared := 0
	rapid.Check(t, func(t *rapid.T) {
		e := anyExpr(4).Draw(t, "e")
		x := big.NewRat(rapid.Int64Range(-50, 50).Draw(t, "num"), rapid.Int64Range(1, 9).Draw(t, "den"))
		want, ok := e.at1(x, symbols)
		if !ok {
			return
		}
		ev := &evaluator{symbols: symbols}
		v, err := ev.eval(e)
		if err != nil {
			return // 1/(s − s) is refused where 1/(s − s)⁰ at a point is not, and the like
		}
		got, ok := v.model().Ratio.Eval(x)
		if !ok {
			return // a pole of the function
		}
		compared++
		if got.Cmp(want) != 0 {
			t.Fatalf("%s at %v is %v, want %v", e, x, got, want)
		}
	})
	if compared < 20 {
		t.Errorf("only %d values compared", compared)
	}
}

// A number with a unit is what the definition of the unit makes of it.
func TestQuantities(t *testing.T) {
	size := map[string]string{"ns": "1e-9", "us": "1e-6", "µs": "1e-6", "ms": "0.001", "s": "1", "min": "60"}
	rapid.Check(t, func(t *rapid.T) {
		mantissa := rapid.Int64Range(0, 1_000_000).Draw(t, "mantissa")
		exponent := rapid.IntRange(-4, 4).Draw(t, "exponent")
		unit := rapid.SampledFrom([]string{"ns", "us", "µs", "ms", "s", "min"}).Draw(t, "unit")
		gap := rapid.SampledFrom([]string{"", " ", "  "}).Draw(t, "gap")
		text := fmt.Sprintf("%de%d%s%s", mantissa, exponent, gap, unit)
		q, err := parseQuantity(text)
		if err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		got, err := q.inUnits(timeDim, "")
		if err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		want := new(big.Rat).Mul(rat(fmt.Sprintf("%de%d", mantissa, exponent)), rat(size[unit]))
		if got.Cmp(want) != 0 {
			t.Fatalf("%s is %v s, want %v", text, got, want)
		}
		if _, err := q.inUnits(frequencyDim, ""); err == nil {
			t.Fatalf("%s is taken for a frequency", text)
		}
	})
}

// oneOff are good files for TestOneCharacterOff.
var oneOff = []string{
	"loop: t\nsymbols: {J: {value: 0.018, spread: 20 %}}\nplant: {model: 1/(J*s^2 + s), dead_time: 1 ms}\n" +
		"controller:\n  pid: {form: standard, K: 2, Ti: 1 s, Td: 3 ms, filter_ratio: 9, map: {i: forward, d: tustin}}\n" +
		"timing: {rate: 1 kHz, compute: 3 us, update: {after: 9 us}}\ninputs: [ramp: 2]\nrequirements: [ramp_error <= 0.3]\n",
	"loop: t\noutput: rad\nplant:\n  model: 1/(s^2 + s)\n  friction: {coulomb: 0.1, static: 0.2, viscous: 1, motion: position, through: 1/s^2}\n  backlash: {gap: 1, at: output}\n" +
		"sensor: {noise: 0.1, offset: 1, encoder: {counts_per_turn: 64, measures: position, turn: 2*pi}}\n" +
		"controller: {model: 2/s, map: tustin, anti_windup: {clamp: [-1, 1]}}\nactuator: {limits: [-2, 2], step: 0.1, deadband: 0.3}\n" +
		"timing: {rate: 1 kHz, latency: 3 us, update_jitter: 5 us, missed: 1 %, stale: {every: 9}, measured: ticks.csv, period_used: measured}\n" +
		"disturbances:\n  - load_step: {at: sensor, size: 1, time: 3 s}\n  - noise: {rms: 1, band: 3 Hz}\n  - file: {name: x, file: d.csv}\n",
	"loop: t\nplant: {model: 1/(s + 1)}\nsensor: {curve: [[0, 3.1], [25, 2.4], [60, 1.2]], step: 0.1}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz, measured: both.csv}\n",
}

// A character deleted, doubled or changed anywhere in a good file gives a loop or plain
// problems with places in the file.
func TestOneCharacterOff(t *testing.T) {
	for _, good := range oneOff {
		if l, problems := Parse("t.yaml", []byte(good), openSide); l == nil {
			t.Fatal(problems)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		r := []rune(rapid.SampledFrom(oneOff).Draw(t, "file"))
		i := rapid.IntRange(0, len(r)-1).Draw(t, "place")
		c := rapid.SampledFrom([]rune("\x00\t\n #:-[]{}\"'&*!|>%@,.0sz()^eJ列\u0301")).Draw(t, "character")
		switch rapid.IntRange(0, 2).Draw(t, "change") {
		case 0:
			r = append(r[:i:i], r[i+1:]...)
		case 1:
			r = append(r[:i:i], append([]rune{c}, r[i:]...)...)
		default:
			r[i] = c
		}
		l, problems := Parse("t.yaml", []byte(string(r)), openSide)
		if (l == nil) != (len(problems) > 0) {
			t.Fatalf("loop %v with %d problems", l != nil, len(problems))
		}
		for _, p := range problems {
			if p.Message == "" || p.File == "t.yaml" && p.Line > strings.Count(string(r), "\n")+1 {
				t.Fatalf("%+v", p)
			}
		}
		_ = problems.Error()
	})
}
