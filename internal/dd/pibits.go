package dd

import (
	"math"
	"math/big"
	"sync"
)

// reduceBig is reduce for |x| > 2^50. A float64 is below 2^1024, so that
// 1024 + 256 bits of π leave r with more than 106 good bits unless x lies within
// 2^-150 of a multiple of π/2.
func reduceBig(x Float) (r Float, quarter int) {
	const bits = 1400
	half := bigHalfPi()
	v := new(big.Float).SetPrec(bits).SetFloat64(x.Hi)
	v.Add(v, new(big.Float).SetFloat64(x.Lo))
	q := new(big.Float).SetPrec(bits).Quo(v, half)
	q.Add(q, big.NewFloat(math.Copysign(0.5, x.Hi)))
	k, _ := q.Int(nil) // toward zero: with the half added, to the nearest
	v.Sub(v, new(big.Float).SetPrec(bits).Mul(half, new(big.Float).SetInt(k)))
	hi, _ := v.Float64()
	lo, _ := v.Sub(v, big.NewFloat(hi)).Float64()
	k.And(k, big.NewInt(3))
	return norm(hi, lo), int(k.Int64())
}

// bigHalfPi is π/2 to 1400 bits by Machin's formula
//
//	π/4 = 4·atan(1/5) − atan(1/239)
//
// in fixed point with 64 guard bits; about 600 terms lose below 10 of them.
var bigHalfPi = sync.OnceValue(func() *big.Float {
	const point = 1464
	atanInverse := func(n int64) *big.Int {
		term := new(big.Int).Lsh(big.NewInt(1), point)
		term.Quo(term, big.NewInt(n))
		sum := new(big.Int)
		for k := int64(1); term.Sign() != 0; k += 2 {
			t := new(big.Int).Quo(term, big.NewInt(k))
			if k%4 == 1 {
				sum.Add(sum, t)
			} else {
				sum.Sub(sum, t)
			}
			term.Quo(term, big.NewInt(n*n))
		}
		return sum
	}
	quarter := atanInverse(5)
	quarter.Lsh(quarter, 2).Sub(quarter, atanInverse(239))
	pi := new(big.Float).SetPrec(1400).SetInt(quarter)
	return pi.SetMantExp(pi, 1-point)
})
