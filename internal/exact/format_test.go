package exact_test

import (
	"math/big"
	"testing"

	"pgregory.net/rapid"
)

// What Format prints, evaluated as an expression, is the function.
func TestFormatEvaluates(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := genRatio(t, "a").Mul(genRatio(t, "b"))
		x := genRat(t, "x")
		want, ok := r.Eval(x)
		if !ok {
			return
		}
		e := evaluator{text: r.Format("q"), x: x}
		if got := e.sum(); e.text != "" || got.Cmp(want) != 0 {
			t.Fatalf("%s at %s: %s, want %s (rest %q)", r.Format("q"), x.RatString(), got.RatString(), want.RatString(), e.text)
		}
	})
}

// evaluator is a small reader of + − * / ^ ( ) with the usual precedence.
type evaluator struct {
	text string
	x    *big.Rat
}

func (e *evaluator) peek() byte {
	for e.text != "" && e.text[0] == ' ' {
		e.text = e.text[1:]
	}
	if e.text == "" {
		return 0
	}
	return e.text[0]
}

func (e *evaluator) sum() *big.Rat {
	v := new(big.Rat)
	if e.peek() == '-' {
		e.text = e.text[1:]
		v.Neg(e.product())
	} else {
		v.Set(e.product())
	}
	for e.peek() == '+' || e.peek() == '-' {
		op := e.peek()
		e.text = e.text[1:]
		w := e.product()
		if op == '-' {
			w.Neg(w)
		}
		v.Add(v, w)
	}
	return v
}

func (e *evaluator) product() *big.Rat {
	v := e.power()
	for e.peek() == '*' || e.peek() == '/' {
		op := e.peek()
		e.text = e.text[1:]
		w := e.power()
		if op == '/' {
			w.Inv(w)
		}
		v.Mul(v, w)
	}
	return v
}

func (e *evaluator) power() *big.Rat {
	v := e.atom()
	if e.peek() != '^' {
		return v
	}
	e.text = e.text[1:]
	n := e.atom().Num().Int64()
	out := big.NewRat(1, 1)
	for range n {
		out.Mul(out, v)
	}
	return out
}

func (e *evaluator) atom() *big.Rat {
	switch e.peek() {
	case '(':
		e.text = e.text[1:]
		v := e.sum()
		if e.peek() != ')' {
			panic("no closing parenthesis before " + e.text)
		}
		e.text = e.text[1:]
		return v
	case 'q':
		e.text = e.text[1:]
		return new(big.Rat).Set(e.x)
	}
	n := 0
	for n < len(e.text) && (e.text[n] >= '0' && e.text[n] <= '9' || e.text[n] == '.') {
		n++
	}
	v := rat(e.text[:n])
	e.text = e.text[n:]
	return v
}
