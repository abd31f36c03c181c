package exact

import (
	"math/big"
	"strconv"
	"strings"
)

// Format prints r as an expression in the variable name, factor by factor,
// hidden modes included, which a loop file reads back as the same function:
//
//	0.5*s*(1 + 0.2*s)^2/(s^2*(1 + (1/3)*s))
//
// A number is a decimal where that is exact within 20 places, else a fraction in parentheses.
func (r Ratio) Format(name string) string {
	if r.IsZero() {
		return "0"
	}
	num := product(r.OriginZeros, r.Num, name)
	den := product(r.OriginPoles, r.Den, name)
	out := number(r.Gain)
	if len(num) > 0 {
		out += "*" + strings.Join(num, "*")
	}
	if len(den) == 0 {
		return out
	}
	return out + "/(" + strings.Join(den, "*") + ")"
}

// String prints r in the variable x.
func (r Ratio) String() string { return r.Format("x") }

func product(origin int, list []Factor, name string) []string {
	var out []string
	if origin > 0 {
		out = append(out, name+power(origin))
	}
	for _, f := range list {
		out = append(out, "("+f.P.Format(name)+")"+power(f.N))
	}
	return out
}

func power(n int) string {
	if n == 1 {
		return ""
	}
	return "^" + strconv.Itoa(n)
}

// Format prints p in ascending powers of the variable name.
func (p Poly) Format(name string) string {
	var b strings.Builder
	for k, c := range p {
		if c.Sign() == 0 {
			continue
		}
		switch {
		case b.Len() > 0 && c.Sign() < 0:
			b.WriteString(" - ")
		case b.Len() > 0:
			b.WriteString(" + ")
		case c.Sign() < 0:
			b.WriteString("-")
		}
		b.WriteString(number(new(big.Rat).Abs(c)))
		if k > 0 {
			b.WriteString("*" + name + power(k))
		}
	}
	if b.Len() == 0 {
		return "0"
	}
	return b.String()
}

// number prints a rational exactly.
func number(x *big.Rat) string {
	if n, exact := x.FloatPrec(); exact && n <= 20 {
		return x.FloatString(n)
	}
	return "(" + x.RatString() + ")"
}
