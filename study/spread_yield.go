package study

import "math"

// within95 is the two-sided 95 % point of the normal distribution.
const within95 = 1.959963984540054

// wilson is the 95 % interval, per cent, of a share of which k of n trials were seen:
//
//	(p + z²/2n ± z·√(p(1 − p)/n + z²/4n²)) / (1 + z²/n)     p = k/n, z = 1.96
//
// E. B. Wilson, "Probable inference, the law of succession, and statistical inference", Journal of the American Statistical Association
// 22, 1927 (from memory). Unlike p ± z·√(p(1 − p)/n) it says something where all trials agree.
func wilson(k, n int64) [2]Figure {
	if n <= 0 {
		return [2]Figure{}
	}
	p, m, z := float64(k)/float64(n), float64(n), within95
	middle := p + z*z/(2*m)
	half := z * math.Sqrt(p*(1-p)/m+z*z/(4*m*m))
	low, high := (middle-half)/(1+z*z/m), (middle+half)/(1+z*z/m)
	if k == 0 { // exact there
		low = 0
	}
	if k == n {
		high = 1
	}
	return [2]Figure{Fig(100 * low), Fig(100 * high)}
}

// counted is a share with its interval; corners are no sample and have none.
func (j *spreadJob) counted(k, n int64, sample bool) Counted {
	c := Counted{Met: k, Of: n, Percent: percentOf(k, n)}
	if sample {
		c.Interval = wilson(k, n)
	}
	return c
}

func percentOf(k, n int64) float64 {
	if n == 0 {
		return 0
	}
	return 100 * float64(k) / float64(n)
}
