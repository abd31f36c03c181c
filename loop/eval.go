package loop

import (
	"errors"
	"fmt"
	"math/big"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

// Bounds on what an expression may become, checked before each step is computed.
const (
	maxPower = 32      // magnitude of an exponent
	maxBits  = 1 << 13 // bits of one constant, 2466 digits
	maxGrown = 64      // zeros or poles of an intermediate result
	// maxWork bounds the work of one file: products of coefficients times their bits
	// squared. Measured: 1e11 take 0.05 s to 0.7 s; an order of 12 with pi in every
	// coefficient takes 1e9 a step.
	maxWork = 3e11
)

// variable is what a model is written in.
type variable string

const (
	constant   variable = ""
	continuous variable = "s"
	sampled    variable = "z"
)

// evaluator turns expressions into functions. Its work counts over a whole file.
type evaluator struct {
	symbols map[string]*big.Rat
	known   []string // names for suggestions, in the order of the file
	work    float64
}

// result is a constant c, or a function m of s or z.
type result struct {
	c *big.Rat
	m sdomain.Model
}

func (v result) model() sdomain.Model {
	if v.c != nil {
		return sdomain.Const(v.c)
	}
	return v.m
}

// names reports the undefined names of e and which variable it uses.
func (ev *evaluator) names(e *expr) (v variable, errs []*exprError) {
	used := map[variable]int{}
	told := map[string]bool{}
	e.walk(func(n *expr) {
		if n.kind != exprName || n.text == "pi" {
			return
		}
		if n.text == "s" || n.text == "z" {
			if _, ok := used[variable(n.text)]; !ok {
				used[variable(n.text)] = n.at
			}
			return
		}
		if _, ok := ev.symbols[n.text]; !ok && !told[n.text] && len(told) < shown {
			told[n.text] = true
			errs = append(errs, ev.undefined(n))
		}
	})
	if _, ok := used[continuous]; ok {
		v = continuous
	}
	if at, ok := used[sampled]; ok {
		if v == continuous {
			errs = append(errs, &exprError{max(at, used[continuous]), "s and z in one expression",
				"a model in s with a map, or a model in z alone", ""})
		}
		v = sampled
	}
	return v, errs
}

func (ev *evaluator) undefined(n *expr) *exprError {
	e := &exprError{at: n.at, message: fmt.Sprintf("%s is not defined", quote(n.text)),
		expected: "a symbol of the symbols section, s, z, pi, sqrt() or exp()"}
	e.nearest = nearest(n.text, append(append([]string(nil), ev.known...), "pi", "sqrt", "exp"))
	return e
}

// walk calls f for every node, in the order of the text.
func (e *expr) walk(f func(*expr)) {
	if e == nil {
		return
	}
	e.x.walk(f)
	f(e)
	e.y.walk(f)
}

// eval computes an expression whose names are all defined and that uses one variable
// at most.
func (ev *evaluator) eval(e *expr) (result, *exprError) {
	switch e.kind {
	case exprNumber:
		return result{c: e.value}, nil
	case exprName:
		return ev.name(e)
	case exprPow:
		return ev.pow(e)
	case exprSqrt:
		return ev.root(e)
	case exprExp:
		return ev.deadTime(e)
	}
	x, err := ev.eval(e.x)
	if err != nil {
		return result{}, err
	}
	if e.kind == exprMinus {
		if x.c != nil {
			return result{c: new(big.Rat).Neg(x.c)}, nil
		}
		return result{m: x.m.Neg()}, nil
	}
	y, err := ev.eval(e.y)
	if err != nil {
		return result{}, err
	}
	if x.c != nil && y.c != nil {
		return ev.constants(e, x.c, y.c)
	}
	return ev.models(e, x.model(), y.model())
}

func (ev *evaluator) name(e *expr) (result, *exprError) {
	switch e.text {
	case "pi":
		return result{c: pi}, nil
	case "s", "z":
		return result{m: sdomain.S()}, nil
	}
	return result{c: ev.symbols[e.text]}, nil
}

// spend counts work; it refuses when a file has used up its share.
func (ev *evaluator) spend(e *expr, products, bits int) *exprError {
	ev.work += float64(products) * (float64(bits)*float64(bits) + 1000)
	if ev.work > maxWork {
		return &exprError{at: e.at, message: "the expressions of this file are too large to compute exactly",
			expected: "fewer factors, or numbers with fewer digits"}
	}
	return nil
}

func bits(c *big.Rat) int { return c.Num().BitLen() + c.Denom().BitLen() }

func tooLong(at, n int) *exprError {
	return &exprError{at: at, message: fmt.Sprintf("a constant of about %d digits arises here", n*3/10),
		expected: fmt.Sprintf("at most %d digits", maxBits*3/10)}
}

func (ev *evaluator) constants(e *expr, x, y *big.Rat) (result, *exprError) {
	if n := bits(x) + bits(y); n > maxBits {
		return result{}, tooLong(e.at, n)
	}
	if err := ev.spend(e, 1, bits(x)+bits(y)); err != nil {
		return result{}, err
	}
	c := new(big.Rat)
	switch e.kind {
	case exprAdd:
		c.Add(x, y)
	case exprSub:
		c.Sub(x, y)
	case exprMul:
		c.Mul(x, y)
	case exprDiv:
		if y.Sign() == 0 {
			return result{}, &exprError{at: e.at, message: "division by zero"}
		}
		c.Quo(x, y)
	}
	return result{c: c}, nil
}

// size is how large a function is: zeros or poles, whichever are more, and the bits of
// its longest coefficient.
func size(r exact.Ratio) (degree, longest int) {
	if r.IsZero() {
		return 0, 1
	}
	longest = bits(r.Gain)
	zeros := r.OriginZeros
	for _, list := range [][]exact.Factor{r.Num, r.Den} {
		for _, f := range list {
			for _, c := range f.P {
				longest = max(longest, bits(c))
			}
		}
	}
	for _, f := range r.Num {
		zeros += f.N * f.P.Degree()
	}
	return max(zeros, r.Order()), longest
}

func (ev *evaluator) models(e *expr, x, y sdomain.Model) (result, *exprError) {
	dx, bx := size(x.Ratio)
	dy, by := size(y.Ratio)
	if dx+dy > maxGrown {
		return result{}, tooHigh(e.at, dx+dy)
	}
	if err := ev.spend(e, (dx+1)*(dy+1), bx+by); err != nil {
		return result{}, err
	}
	var m sdomain.Model
	var err error
	switch e.kind {
	case exprAdd:
		m, err = x.Add(y)
	case exprSub:
		m, err = x.Sub(y)
	case exprMul:
		m, err = x.Mul(y)
	case exprDiv:
		m, err = x.Div(y)
	}
	if err != nil {
		return result{}, algebraError(e.at, err)
	}
	return result{m: m}, nil
}

func tooHigh(at, n int) *exprError {
	return &exprError{at: at, message: fmt.Sprintf("a model of order %d arises here", n),
		expected: fmt.Sprintf("an order of at most %d", maxOrder)}
}

// algebraError words an error of the model algebra for the reader of a loop file.
func algebraError(at int, err error) *exprError {
	e := &exprError{at: at, message: err.Error()}
	var delay *sdomain.DelayError
	switch {
	case errors.Is(err, exact.ErrZeroDivision):
		e.message = "division by zero"
	case errors.As(err, &delay):
		e.expected = "one dead time that multiplies the whole model, G*exp(-c*s) with c >= 0"
	}
	return e
}

func (ev *evaluator) pow(e *expr) (result, *exprError) {
	y, err := ev.eval(e.y)
	if err != nil {
		return result{}, err
	}
	if y.c == nil || !y.c.IsInt() || y.c.Num().CmpAbs(big.NewInt(maxPower)) > 0 {
		return result{}, &exprError{at: e.y.first(), message: "this exponent is not allowed",
			expected: fmt.Sprintf("a whole number from -%d to %d", maxPower, maxPower)}
	}
	n := int(y.c.Num().Int64())
	x, err := ev.eval(e.x)
	if err != nil {
		return result{}, err
	}
	if x.c != nil {
		return ev.constantPower(e, x.c, n)
	}
	d, b := size(x.m.Ratio)
	if grown := d * max(n, -n); grown > maxGrown {
		return result{}, tooHigh(e.at, grown)
	}
	if err := ev.spend(e, 1, b*max(n, -n)); err != nil {
		return result{}, err
	}
	m, fault := x.m.Pow(n)
	if fault != nil {
		return result{}, algebraError(e.at, fault)
	}
	return result{m: m}, nil
}

func (ev *evaluator) constantPower(e *expr, x *big.Rat, n int) (result, *exprError) {
	grown := bits(x) * max(n, -n)
	if grown > maxBits {
		return result{}, tooLong(e.at, grown)
	}
	if n < 0 && x.Sign() == 0 {
		return result{}, &exprError{at: e.at, message: "division by zero"}
	}
	if err := ev.spend(e, max(n, -n), grown); err != nil {
		return result{}, err
	}
	c := big.NewRat(1, 1)
	for range max(n, -n) {
		c.Mul(c, x)
	}
	if n < 0 {
		c.Inv(c)
	}
	return result{c: c}, nil
}

// first is the place of the first character of e.
func (e *expr) first() int {
	switch e.kind {
	case exprAdd, exprSub, exprMul, exprDiv, exprPow:
		return e.x.first()
	}
	return e.at
}

func (ev *evaluator) root(e *expr) (result, *exprError) {
	x, err := ev.eval(e.x)
	if err != nil {
		return result{}, err
	}
	if x.c == nil || x.c.Sign() < 0 {
		return result{}, &exprError{at: e.at, message: "the root of something other than a constant >= 0",
			expected: "sqrt() of numbers and symbols, not negative"}
	}
	if err := ev.spend(e, 1, bits(x.c)+2*sqrtBits); err != nil {
		return result{}, err
	}
	return result{c: sqrt(x.c)}, nil
}

// deadTime evaluates exp(-c*s).
func (ev *evaluator) deadTime(e *expr) (result, *exprError) {
	refuse := &exprError{at: e.at, message: "exp() is for a dead time only", expected: "exp(-c*s) with a constant c >= 0, in seconds"}
	var inZ bool
	e.x.walk(func(n *expr) { inZ = inZ || n.kind == exprName && n.text == "z" })
	if inZ {
		refuse.expected = "z^-n for a delay of n ticks"
		return result{}, refuse
	}
	x, err := ev.eval(e.x)
	if err != nil {
		return result{}, err
	}
	r := x.model().Ratio
	if r.IsZero() {
		return result{c: big.NewRat(1, 1)}, nil
	}
	if x.c != nil || x.m.Delay != nil && x.m.Delay.Sign() != 0 ||
		r.OriginZeros != 1 || r.OriginPoles != 0 || len(r.Num)+len(r.Den) > 0 {
		return result{}, refuse
	}
	if r.Gain.Sign() > 0 {
		refuse.message = "exp() with a positive exponent would look ahead in time"
		return result{}, refuse
	}
	if fault := checkSeconds(new(big.Rat).Neg(r.Gain)); fault != "" {
		return result{}, &exprError{at: e.at, message: fault}
	}
	m, fault := sdomain.Exp(new(big.Rat).Neg(r.Gain))
	if fault != nil {
		return result{}, algebraError(e.at, fault)
	}
	return result{m: m}, nil
}
