package loop

import (
	"fmt"
	"math/big"
	"strconv"
	"strings"
)

// numberForm says how a number is written.
const numberForm = "a decimal number such as 12, -0.5 or 4.7e-6, at most 200 digits, exponent from -300 to 300"

// maxExponent bounds the decimal exponent of a number as written.
const maxExponent = 300

// scanNumber finds the unsigned decimal number at the start of s:
//
//	digits [ . [digits] ] [ (e|E) [+|-] digits ]   or   . digits …
//
// n is its length in bytes, 0 when s does not start with one. An e that no digit
// follows is not part of the number.
func scanNumber(s string) (n int) {
	i, digits := 0, 0
	for ; i < len(s) && isDigit(s[i]); i++ {
		digits++
	}
	if i < len(s) && s[i] == '.' {
		j := i + 1
		for ; j < len(s) && isDigit(s[j]); j++ {
			digits++
		}
		i = j
	}
	if digits == 0 {
		return 0
	}
	if i < len(s) && (s[i] == 'e' || s[i] == 'E') {
		j := i + 1
		if j < len(s) && (s[j] == '+' || s[j] == '-') {
			j++
		}
		if j < len(s) && isDigit(s[j]) {
			for ; j < len(s) && isDigit(s[j]); j++ {
			}
			i = j
		}
	}
	return i
}

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

// exactNumber is the value of a number found by scanNumber. The error is a plain
// sentence about its length or exponent.
func exactNumber(s string) (*big.Rat, error) {
	mantissa, exponent := s, ""
	if i := strings.IndexAny(s, "eE"); i >= 0 {
		mantissa, exponent = s[:i], s[i+1:]
	}
	if n := len(strings.ReplaceAll(mantissa, ".", "")); n > maxDigits {
		return nil, fmt.Errorf("a number of %d digits, at most %d are read", n, maxDigits)
	}
	e := 0
	if exponent != "" {
		var err error
		if e, err = strconv.Atoi(exponent); err != nil || e > maxExponent || e < -maxExponent {
			return nil, fmt.Errorf("exponent %s is outside -%d to %d", quote(exponent), maxExponent, maxExponent)
		}
	}
	if strings.HasPrefix(mantissa, ".") {
		mantissa = "0" + mantissa
	}
	v, ok := new(big.Rat).SetString(strings.TrimSuffix(mantissa, "."))
	if !ok {
		return nil, fmt.Errorf("%s is not a number", quote(s))
	}
	return v.Mul(v, power10(e)), nil
}

// power10 is 10^e, exact.
func power10(e int) *big.Rat {
	p := new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(max(e, -e))), nil)
	if e < 0 {
		return new(big.Rat).SetFrac(big.NewInt(1), p)
	}
	return new(big.Rat).SetInt(p)
}

// pi to 70 digits: the error is below 5e-70, half a unit of the last one.
var pi, _ = new(big.Rat).SetString("3.141592653589793238462643383279502884197169399375105820974944592307816")

// sqrtBits is the precision of an irrational root: 2^-220 is 6e-67, more than 60 digits.
const sqrtBits = 220

// sqrt is the root of a non-negative number: exact when numerator and denominator are
// squares, else rounded down at a relative error below 2^-sqrtBits.
func sqrt(v *big.Rat) *big.Rat {
	if v.Sign() == 0 {
		return new(big.Rat)
	}
	n, d := new(big.Int).Sqrt(v.Num()), new(big.Int).Sqrt(v.Denom())
	if new(big.Int).Mul(n, n).Cmp(v.Num()) == 0 && new(big.Int).Mul(d, d).Cmp(v.Denom()) == 0 {
		return new(big.Rat).SetFrac(n, d)
	}
	// √(n/d) = √(n·4^k/d) / 2^k with k such that the root has sqrtBits + 1 bits or more.
	k := sqrtBits + 2 + (v.Denom().BitLen()-v.Num().BitLen())/2
	num, den := new(big.Int).Set(v.Num()), new(big.Int).Set(v.Denom())
	if k >= 0 {
		num.Lsh(num, uint(2*k))
	} else {
		den.Lsh(den, uint(-2*k))
	}
	root := new(big.Rat).SetInt(num.Sqrt(num.Quo(num, den)))
	scale := new(big.Rat).SetInt(new(big.Int).Lsh(big.NewInt(1), uint(max(k, -k))))
	if k >= 0 {
		return root.Quo(root, scale)
	}
	return root.Mul(root, scale)
}
