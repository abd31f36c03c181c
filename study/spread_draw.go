package study

import (
	"encoding/binary"
	"math"
	"math/big"
	"math/rand/v2"
)

// deltas are the places of the drawn symbols within their spreads in trial k, −1 to 1, in the order of the file. They depend on the kind
// of draw, the seed and k alone.
func (j *spreadJob) deltas(k int64) []float64 {
	out := j.grades(k)
	for i, g := range out {
		out[i] = placeOf(j.o.Draw, g)
	}
	return out
}

// grades are the shares of all draws that lie below those of trial k, 0 to 1: the ranks of the symbols without the other trials. Every
// symbol takes one number of a ChaCha8 generator (the specification C2SP chacha8rand) whose key holds seed and k:
//
//	key = seed, k (little endian, 8 bytes each), "steadytick spread"[:16]
//	g   = ⌊x/2¹¹⌋/2⁵³      x the next 64 bits
//
// Corner k, from 1, has symbol i at its high end where bit i of k − 1 is set.
func (j *spreadJob) grades(k int64) []float64 {
	out := make([]float64, len(j.symbols))
	if j.o.Draw == DrawCorners {
		return cornerGrades(k, len(out))
	}
	var key [32]byte
	binary.LittleEndian.PutUint64(key[:], j.o.Seed)
	binary.LittleEndian.PutUint64(key[8:], uint64(k))
	copy(key[16:], "steadytick spread")
	source := rand.NewChaCha8(key)
	for i := range out {
		out[i] = float64(source.Uint64()>>11) * 0x1p-53
	}
	return out
}

func cornerGrades(k int64, n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = float64((k - 1) >> i & 1)
	}
	return out
}

// sigmas is how many standard deviations of the normal draw the spread is.
const sigmas = 3

// placeOf turns a grade into a place within the spread, −1 to 1: the inverse of the distribution function
//
//	uniform   F(x) = (1 + x)/2
//	normal    F(x) = (1 + erf(3x/√2)/erf(3/√2))/2     sigma 1/3, nothing beyond ±1
func placeOf(draw string, grade float64) float64 {
	x := 2*grade - 1
	if draw == DrawNormal {
		x = math.Erfinv(x*math.Erf(sigmas/math.Sqrt2)) * math.Sqrt2 / sigmas
	}
	return math.Max(-1, math.Min(1, x))
}

// twelveDigits rounds to 12 significant decimal digits: short fractions keep the exact arithmetic of the models fast, and no supplier
// tells the thirteenth digit.
func twelveDigits(v *big.Rat) *big.Rat {
	f := new(big.Float).SetPrec(256).SetRat(v)
	out, ok := new(big.Rat).SetString(f.Text('e', 11))
	if !ok {
		return v
	}
	return out
}
