package discretize

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/sdomain"
)

// Alias is a pair of plant poles that sampling nearly maps on one point of the z
// plane: samples cannot tell one from the other, and the hold can hardly drive one without
// the other.
type Alias struct {
	A, B      complex128 // the poles, s plane, Im A >= Im B
	Frequency float64    // rad/s: half of Im(A − B) for a conjugate pair, the mode's ω; else Im(A − B)
	K         int        // how many turns they lie apart, >= 1
	Closeness float64    // |(A − B)·T − j2πK|, rad; 0 is exactly pathological
}

const (
	// aliasTurn: pairs are reported within 1 % of a turn, 2π/100; the mode's share of the
	// samples is then below about that fraction. Our choice.
	aliasTurn = 2 * math.Pi / 100
	// aliasDecay: a mode that falls below 1 % within one tick is not worth a warning.
	aliasDecay = 0.01
)

// Pathological lists the pairs of poles with
//
//	p_i − p_j ≈ j·2πk/T,   k = 1, 2, …
//
// at which the hold equivalent loses reachability and observability (Kalman, Ho,
// Narendra, 1963; from memory). For a mode −a ± jω that is T ≈ kπ/ω. Each pair of
// conjugate doubles is listed once (with Im A > 0, or B = conj A).
func Pathological(m sdomain.Model, T *big.Rat) ([]Alias, error) {
	if T == nil || T.Sign() <= 0 {
		return nil, &PeriodError{T}
	}
	if m.Ratio.IsZero() {
		return nil, nil
	}
	poles, err := m.Ratio.Poles()
	if err != nil {
		return nil, err
	}
	poles = sortPoles(poles)
	if m.Ratio.OriginPoles > 0 {
		poles = append(poles, dd.Complex{})
	}
	td := dd.FromRat(T)
	var out []Alias
	for i, a := range poles {
		for j, b := range poles {
			if i == j || a.Im.Cmp(b.Im) <= 0 || !firstOfMirror(a, b) {
				continue
			}
			if x, ok := alias(a, b, td); ok && !contains(out, x) {
				out = append(out, x)
			}
		}
	}
	return out, nil
}

// firstOfMirror tells whether the pair (a, b) is listed rather than its mirror
// image (conj b, conj a): the one whose middle lies above or on the real axis.
func firstOfMirror(a, b dd.Complex) bool { return a.Im.Add(b.Im).Sign() >= 0 }

// contains finds the same pair again, which multiple poles give.
func contains(list []Alias, x Alias) bool {
	for _, v := range list {
		if v == x {
			return true
		}
	}
	return false
}

func alias(a, b dd.Complex, T dd.Float) (Alias, bool) {
	d := a.Sub(b).Scale(T)
	turns := d.Im.Div(dd.Pi.Ldexp(1)).Float64()
	k := math.Round(turns)
	if !(k >= 1 && k <= math.MaxInt32) {
		return Alias{}, false
	}
	d.Im = d.Im.Sub(dd.Pi.Ldexp(1).MulFloat(k))
	slow := math.Max(a.Re.Float64(), b.Re.Float64()) * T.Float64()
	if !(d.Abs() <= aliasTurn) || slow < math.Log(aliasDecay) {
		return Alias{}, false
	}
	x := Alias{A: a.Complex128(), B: b.Complex128(), K: int(k), Closeness: d.Abs()}
	x.Frequency = a.Im.Sub(b.Im).Float64()
	if b == a.Conj() {
		x.Frequency /= 2
	}
	return x, true
}
