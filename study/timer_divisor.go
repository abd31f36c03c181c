package study

import (
	"math/big"
	"math/bits"
	"slices"
)

// divisors lists every divisor of x >= 1, in no order: at most 103 680 for 64 bits, a few hundred as a rule.
func divisors(x uint64) []uint64 {
	out := []uint64{1}
	factors := primeFactors(x)
	for i := 0; i < len(factors); {
		p, have := factors[i], len(out)
		for power := p; i < len(factors) && factors[i] == p; i, power = i+1, power*p {
			for _, d := range out[:have] {
				out = append(out, d*power)
			}
		}
	}
	return out
}

// smallDivisors are tried one by one; what is left has no factor below them.
const smallDivisors = 1 << 8

// primeFactors lists the prime factors of x >= 1 with their multiplicity, ascending.
func primeFactors(x uint64) []uint64 {
	var out []uint64
	for d := uint64(2); d < smallDivisors && d*d <= x; d++ {
		for ; x%d == 0; x /= d {
			out = append(out, d)
		}
	}
	out = append(out, largeFactors(x)...)
	slices.Sort(out)
	return out
}

// largeFactors lists the prime factors of a number without small ones, 1 having none.
func largeFactors(x uint64) []uint64 {
	if x == 1 {
		return nil
	}
	if new(big.Int).SetUint64(x).ProbablyPrime(0) { // certain below 2⁶⁴, as its documentation has it
		return []uint64{x}
	}
	for c := uint64(1); ; c++ {
		if d := cycleDivisor(x, c); d > 0 {
			return append(largeFactors(d), largeFactors(x/d)...)
		}
	}
}

// gathered: one gcd costs about as much as some fifty steps.
const gathered = 64

// cycleDivisor is a divisor of a composite x, neither 1 nor x, by the cycle of a pseudo-random sequence (Pollard 1975):
//
//	a ← a² + c mod x,   gcd(x, |a_i − a_2i|)
//
// A prime divisor d shows after about √d steps, 2¹⁶ for the greatest that may be the lesser of two in 64 bits. The sequence of a c can
// fail, where all divisors show at once: 0.
func cycleDivisor(x, c uint64) uint64 {
	slow, fast := uint64(2), uint64(2)
	step := func() uint64 {
		slow, fast = squarePlus(slow, c, x), squarePlus(squarePlus(fast, c, x), c, x)
		return max(slow, fast) - min(slow, fast)
	}
	for {
		slow0, fast0, all := slow, fast, uint64(1)
		for range gathered {
			all = mulMod(all, step(), x)
		}
		d := gcd(all, x)
		if d == x { // several divisors within the gathered steps: once more, one by one
			for slow, fast, d = slow0, fast0, 1; d == 1; {
				d = gcd(step(), x)
			}
		}
		switch d {
		case 1:
			continue
		case x:
			return 0
		}
		return d
	}
}

// squarePlus is a² + c mod m, c below m.
func squarePlus(a, c, m uint64) uint64 {
	sum, carry := bits.Add64(mulMod(a, a, m), c, 0)
	return bits.Rem64(carry, sum, m)
}

func mulMod(a, b, m uint64) uint64 {
	hi, lo := bits.Mul64(a, b)
	return bits.Rem64(hi, lo, m)
}

func gcd(a, b uint64) uint64 {
	for b != 0 {
		a, b = b, a%b
	}
	return a
}
