package exact

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
)

// bigC is a complex number of big.Float parts, all of one precision. Values are immutable.
type bigC struct{ re, im *big.Float }

func newC(prec uint, re, im float64) bigC {
	return bigC{
		new(big.Float).SetPrec(prec).SetFloat64(re),
		new(big.Float).SetPrec(prec).SetFloat64(im),
	}
}

// at returns a at another precision.
func (a bigC) at(prec uint) bigC {
	return bigC{
		new(big.Float).SetPrec(prec).Set(a.re),
		new(big.Float).SetPrec(prec).Set(a.im),
	}
}

func (a bigC) prec() uint { return a.re.Prec() }

func (a bigC) isZero() bool { return a.re.Sign() == 0 && a.im.Sign() == 0 }

func (a bigC) add(b bigC) bigC {
	return bigC{new(big.Float).Add(a.re, b.re), new(big.Float).Add(a.im, b.im)}
}

func (a bigC) sub(b bigC) bigC {
	return bigC{new(big.Float).Sub(a.re, b.re), new(big.Float).Sub(a.im, b.im)}
}

func (a bigC) mul(b bigC) bigC {
	var t big.Float
	re := new(big.Float).Mul(a.re, b.re)
	re.Sub(re, t.Mul(a.im, b.im))
	im := new(big.Float).Mul(a.re, b.im)
	var u big.Float
	im.Add(im, u.Mul(a.im, b.re))
	return bigC{re, im}
}

// div returns a/b, b not zero.
func (a bigC) div(b bigC) bigC {
	n := a.mul(bigC{b.re, new(big.Float).Neg(b.im)})
	d := b.norm()
	return bigC{n.re.Quo(n.re, d), n.im.Quo(n.im, d)}
}

// norm returns |a|².
func (a bigC) norm() *big.Float {
	n := new(big.Float).Mul(a.re, a.re)
	var t big.Float
	return n.Add(n, t.Mul(a.im, a.im))
}

// abs returns |a|.
func (a bigC) abs() *big.Float {
	n := a.norm()
	if n.Sign() == 0 {
		return n
	}
	return n.Sqrt(n)
}

// toDD rounds to 106 bits and splits; ok is false outside the range of float64.
func toDD(x *big.Float) (v dd.Float, ok bool) {
	if x.Sign() == 0 {
		return dd.Float{}, true
	}
	x = new(big.Float).SetPrec(106).Set(x)
	hi, _ := x.Float64()
	if math.IsInf(hi, 0) || hi == 0 {
		return dd.Float{}, false
	}
	rest := new(big.Float).SetPrec(106).SetFloat64(hi)
	lo, _ := rest.Sub(x, rest).Float64()
	return dd.Float{Hi: hi, Lo: lo}, true
}
