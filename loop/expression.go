package loop

import (
	"fmt"
	"math/big"
	"strings"
)

// exprKind is the sort of a node of an expression.
type exprKind byte

const (
	exprNumber exprKind = '0' // text, value
	exprName   exprKind = 'a' // text: a symbol, s, z or pi
	exprSqrt   exprKind = 'r' // √x
	exprExp    exprKind = 'e' // e^x
	exprMinus  exprKind = 'm' // −x
	exprAdd    exprKind = '+' // x + y, and so on
	exprSub    exprKind = '-'
	exprMul    exprKind = '*'
	exprDiv    exprKind = '/'
	exprPow    exprKind = '^'
)

// expr is a node of an expression. Parentheses and the two ways to write a product
// leave no trace in it.
type expr struct {
	kind  exprKind
	at    int // place in the text, characters from 0: of the operator where there is one
	text  string
	value *big.Rat
	x, y  *expr
}

// maxDepth bounds how deep an expression may be nested.
const maxDepth = 200

// reserved names cannot be symbols.
var reserved = []string{"s", "z", "pi", "sqrt", "exp"}

// parseExpression reads an expression:
//
//	sum      = product { ("+" | "-") product }
//	product  = unary { ("*" | "/") unary }
//	unary    = ("-" | "+") unary | joined
//	joined   = power { power }         the second and later ones begin with s, z or (
//	power    = atom [ "^" exponent ]
//	exponent = ["-" | "+"] (number | name | "(" sum ")")
//	atom     = number | name | "(" sum ")" | "sqrt" "(" sum ")" | "exp" "(" sum ")"
//
// A division whose right side is joined is refused, since readers differ on it.
func parseExpression(text string) (*expr, *exprError) {
	tokens, err := lex(text)
	if err != nil {
		return nil, err
	}
	p := &exprParser{tokens: tokens}
	if p.peek().kind == tokEnd {
		return nil, &exprError{0, "the expression is empty", "an expression such as 4.2*(0.21*s + 1)/s", ""}
	}
	e := p.sum()
	if p.err == nil && p.peek().kind != tokEnd {
		p.stray(p.peek())
	}
	if p.err != nil {
		return nil, p.err
	}
	return e, nil
}

// exprParser stops at its first error; after one, peek returns the end.
type exprParser struct {
	tokens []lexeme
	next   int
	depth  int
	err    *exprError
}

func (p *exprParser) peek() lexeme {
	if p.err != nil {
		return p.tokens[len(p.tokens)-1]
	}
	return p.tokens[p.next]
}

func (p *exprParser) take() lexeme {
	t := p.peek()
	if t.kind != tokEnd {
		p.next++
	}
	return t
}

func (p *exprParser) is(signs string) bool {
	t := p.peek()
	return t.kind == tokSign && strings.Contains(signs, t.text)
}

func (p *exprParser) fail(at int, message, expected, nearest string) *expr {
	if p.err == nil {
		p.err = &exprError{at, message, expected, nearest}
	}
	return &expr{kind: exprNumber, text: "0", value: new(big.Rat)}
}

// deeper counts a level of nesting; it reports false and fails when there are too many.
func (p *exprParser) deeper() bool {
	p.depth++
	if p.depth > maxDepth {
		p.fail(p.peek().at, fmt.Sprintf("the expression is nested more than %d deep", maxDepth), "", "")
	}
	return p.err == nil
}

func (p *exprParser) sum() *expr {
	left := p.product()
	for p.is("+-") {
		t := p.take()
		left = &expr{kind: exprKind(t.text[0]), at: t.at, x: left, y: p.product()}
	}
	return left
}

func (p *exprParser) product() *expr {
	left, _ := p.unary()
	for p.is("*/") {
		t := p.take()
		right, joined := p.unary()
		if t.text == "/" && joined && p.err == nil {
			p.fail(t.at, "a division followed by a product without * can be read in two ways", twoReadings(left, right), "")
		}
		left = &expr{kind: exprKind(t.text[0]), at: t.at, x: left, y: right}
	}
	return left
}

// twoReadings writes left/right, right being a product without *, in its two readings.
func twoReadings(left, right *expr) string {
	minus := right.kind == exprMinus
	if minus {
		right = right.x
	}
	first, rest := right, []*expr{}
	for first.kind == exprMul {
		first, rest = first.x, append([]*expr{first.y}, rest...)
	}
	if minus {
		right, first = &expr{kind: exprMinus, x: right}, &expr{kind: exprMinus, x: first}
	}
	one := writeExpr(&expr{kind: exprDiv, x: left, y: right}, 0)
	two := "(" + writeExpr(&expr{kind: exprDiv, x: left, y: first}, 0) + ")"
	for _, e := range rest {
		two += "*" + writeExpr(e, levelPower)
	}
	if len(one)+len(two) > 120 {
		return "a/(b*c) or (a/b)*c"
	}
	return one + " or " + two
}

// unary also tells whether what it read is a product without *.
func (p *exprParser) unary() (e *expr, joined bool) {
	if !p.is("+-") {
		return p.joined()
	}
	t := p.take()
	if !p.deeper() {
		return p.fail(t.at, "", "", ""), false
	}
	defer func() { p.depth-- }()
	e, joined = p.unary()
	if t.text == "-" {
		e = &expr{kind: exprMinus, at: t.at, x: e}
	}
	return e, joined
}

func (p *exprParser) joined() (e *expr, joined bool) {
	e = p.power()
	for {
		t := p.peek()
		switch {
		case t.kind == tokName && (t.text == "s" || t.text == "z"), t.kind == tokSign && t.text == "(":
			e, joined = &expr{kind: exprMul, at: t.at, x: e, y: p.power()}, true
		case t.kind == tokName || t.kind == tokNumber:
			return p.fail(t.at, fmt.Sprintf("there is no operator before %s", quote(t.text)),
				"* between the factors; only s, z and ( may follow directly", ""), false
		default:
			return e, joined
		}
	}
}

func (p *exprParser) power() *expr {
	base := p.atom()
	if !p.is("^") {
		return base
	}
	t := p.take()
	e := &expr{kind: exprPow, at: t.at, x: base, y: p.exponent()}
	if p.is("^") {
		return p.fail(p.peek().at, "a power of a power can be read in two ways", "(a^b)^c or a^(b*c)", "")
	}
	return e
}

func (p *exprParser) exponent() *expr {
	if p.is("+-") {
		t := p.take()
		if p.is("+-") {
			return p.fail(p.peek().at, "two signs in an exponent", "", "")
		}
		e := p.atom()
		if t.text == "-" {
			e = &expr{kind: exprMinus, at: t.at, x: e}
		}
		return e
	}
	return p.atom()
}

func (p *exprParser) atom() *expr {
	t := p.take()
	switch {
	case t.kind == tokNumber:
		v, err := exactNumber(t.text)
		if err != nil {
			return p.fail(t.at, err.Error(), numberForm, "")
		}
		return &expr{kind: exprNumber, at: t.at, text: t.text, value: v}
	case t.kind == tokName && (t.text == "sqrt" || t.text == "exp"):
		if !p.is("(") {
			return p.fail(t.at, t.text+" without its parenthesis", t.text+"(…)", "")
		}
		p.take()
		kind := exprSqrt
		if t.text == "exp" {
			kind = exprExp
		}
		return &expr{kind: kind, at: t.at, x: p.group()}
	case t.kind == tokName:
		return &expr{kind: exprName, at: t.at, text: t.text}
	case t.kind == tokSign && t.text == "(":
		return p.group()
	}
	return p.stray(t)
}

// group reads what follows an opening parenthesis, and the closing one.
func (p *exprParser) group() *expr {
	if !p.deeper() {
		return p.fail(0, "", "", "")
	}
	defer func() { p.depth-- }()
	open := p.tokens[p.next-1]
	e := p.sum()
	if !p.is(")") {
		if p.peek().kind == tokEnd {
			return p.fail(open.at, "this parenthesis is not closed", ")", "")
		}
		return p.stray(p.peek())
	}
	p.take()
	return e
}

func (p *exprParser) stray(t lexeme) *expr {
	const operand = "a number, a symbol, s, z or ("
	switch {
	case t.kind == tokEnd:
		return p.fail(t.at, "the expression ends too early", operand, "")
	case t.text == ")" && p.depth == 0:
		return p.fail(t.at, "this parenthesis was never opened", "", "")
	}
	return p.fail(t.at, fmt.Sprintf("%s does not fit here", quote(t.text)), operand, "")
}
