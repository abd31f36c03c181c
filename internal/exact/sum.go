package exact

import "math/big"

// Add returns r + q over the least common denominator:
//
//	r + q = C · (r' · D/D_r  +  q' · D/D_q) / D,   D = lcm(D_r, D_q)
//
// where C collects what both numerators share as it is written. A factor that both
// denominators have, written alike or hidden within larger factors, is counted
// once with its higher power, so that Kp + Ki/x + Kd·x/(Tf·x + 1) has the
// denominator x·(Tf·x + 1). A factor of D that the sum happens to
// contain is not cancelled.
func (r Ratio) Add(q Ratio) Ratio {
	if r.IsZero() {
		return q.orZero()
	}
	if q.IsZero() {
		return r
	}
	den, missingR, missingQ := lcm(r.Den, q.Den)
	poles := max(r.OriginPoles, q.OriginPoles)
	shared, numR, numQ := split(r.Num, q.Num)
	zr := r.OriginZeros + poles - r.OriginPoles
	zq := q.OriginZeros + poles - q.OriginPoles
	z := min(zr, zq)
	sum := expand(numR).Mul(expand(missingR)).Scale(r.Gain).Shift(zr - z).
		Add(expand(numQ).Mul(expand(missingQ)).Scale(q.Gain).Shift(zq - z))
	if sum.IsZero() {
		return Const(new(big.Rat))
	}
	gain, k, p := sum.Origin()
	return Ratio{
		Gain: gain, OriginZeros: z + k, OriginPoles: poles,
		Num: addFactor(shared, p, 1), Den: den,
	}
}

// Sub returns r − q, as Add does.
func (r Ratio) Sub(q Ratio) Ratio { return r.Add(q.Neg()) }

// orZero replaces the zero value by the constant 0.
func (r Ratio) orZero() Ratio {
	if r.IsZero() {
		return Const(new(big.Rat))
	}
	return r
}

// lcm returns the least common multiple of two products and what each lacks of it.
func lcm(a, b []Factor) (m, missingA, missingB []Factor) {
	for _, c := range refine(a, b) {
		n := max(c.a, c.b)
		m = addFactor(m, c.p, n)
		missingA = addFactor(missingA, c.p, n-c.a)
		missingB = addFactor(missingB, c.p, n-c.b)
	}
	return m, missingA, missingB
}

// split returns the factors that a and b have in common as written, and the rests.
func split(a, b []Factor) (shared, restA, restB []Factor) {
	restB = append([]Factor(nil), b...)
	for _, f := range a {
		n := 0
		for i := range restB {
			if restB[i].P.Equal(f.P) {
				n = min(f.N, restB[i].N)
				restB[i].N -= n
			}
		}
		shared = addFactor(shared, f.P, n)
		restA = addFactor(restA, f.P, f.N-n)
	}
	return shared, restA, merge(nil, restB)
}
