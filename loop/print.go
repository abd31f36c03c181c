package loop

// Levels of binding, loosest first.
const (
	levelSum = iota
	levelProduct
	levelUnary
	levelPower
	levelAtom
)

func (e *expr) level() int {
	switch e.kind {
	case exprAdd, exprSub:
		return levelSum
	case exprMul, exprDiv:
		return levelProduct
	case exprMinus:
		return levelUnary
	case exprPow:
		return levelPower
	}
	return levelAtom
}

// String writes the expression so that parsing it gives the same tree again.
func (e *expr) String() string { return writeExpr(e, levelSum) }

// writeExpr writes e, in parentheses when it binds looser than level.
func writeExpr(e *expr, level int) string {
	var s string
	switch e.kind {
	case exprNumber, exprName:
		s = e.text
	case exprSqrt:
		s = "sqrt(" + writeExpr(e.x, levelSum) + ")"
	case exprExp:
		s = "exp(" + writeExpr(e.x, levelSum) + ")"
	case exprMinus:
		s = "-" + writeExpr(e.x, levelPower)
	case exprPow:
		s = writeExpr(e.x, levelAtom) + "^" + printExponent(e.y)
	default:
		l := e.level()
		s = writeExpr(e.x, l) + string(e.kind) + writeExpr(e.y, l+1)
		if e.y.kind == exprMinus {
			s = writeExpr(e.x, l) + string(e.kind) + "(" + writeExpr(e.y, levelSum) + ")"
		}
	}
	if e.level() < level {
		return "(" + s + ")"
	}
	return s
}

func printExponent(e *expr) string {
	if e.kind == exprMinus && e.x.level() == levelAtom {
		return "-" + writeExpr(e.x, levelAtom)
	}
	return writeExpr(e, levelAtom)
}

// same reports whether two expressions are the same tree, places apart.
func (e *expr) same(f *expr) bool {
	if e == nil || f == nil {
		return e == f
	}
	return e.kind == f.kind && e.text == f.text && e.x.same(f.x) && e.y.same(f.y)
}
