package discretize

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/internal/poly"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// Hold returns the exact hold equivalent of m at period T: the samples at kT of
// the response to a staircase u that switches at kT + delay + m.Delay.
//
// With the total delay τ = d·T + ε, 0 <= ε < T, and the cascade realization of
// Plant, the output at kT + h (0 <= h <= T) of the undelayed plant is
//
//	G_h(δ) = C e^{Ah} (δI − A_δ)^-1 Γ/T + C Γ(h) + D,   Γ(h) = ∫_0^h e^{As} B ds
//	H(z)   = z^-d · G_0                                 when ε = 0
//	H(z)   = z^-d · z^-1 · G_(T−ε)                      when ε > 0
//
// (the "modified" or advanced z-transform; e.g. Jury, 1964; Åström and Wittenmark,
// Computer-Controlled Systems, "systems with time delay"; from memory). d goes to
// Ticks, never to states; ε > 0 adds one pole at z = 0, that is δ = −1/T.
//
// A negative delay >= −T gives the output between ticks, at kT + |delay|, as
// numerator; at −T exactly the value just before the next switching.
//
// Distortion: none; this is what the samples do. Preserved: stability (poles map by
// z = e^{sT}), order plus one for ε > 0, DC gain and integrators exactly, the leading
// Laurent coefficient at the origin for a plant with or without integrators. Not
// preserved: zeros. A plant with s^n in the numerator has one zero at δ = 0 only.
//
// A plant that passes u straight through (biproper) with no delay is allowed; the
// caller decides what an algebraic loop is. Zeros at the origin that hide poles at
// the origin stay hidden there. Errors: *ImproperError, *DelayError, *GrowthError,
// *RangeError, *PeriodError, or the root finder's.
func Hold(m sdomain.Model, T, delay *big.Rat) (zdomain.Model, error) {
	p, err := Prepare(m)
	if err != nil {
		return zdomain.Model{}, err
	}
	return p.Hold(T, delay)
}

// Hold is the function Hold for a prepared plant: use it when one plant is held
// at many periods or delays.
func (p *Plant) Hold(T, delay *big.Rat) (zdomain.Model, error) {
	a, err := p.At(T)
	if err != nil {
		return zdomain.Model{}, err
	}
	return a.Hold(delay)
}

// PlantAt is a Plant at one period, with what no delay changes computed once: use it for
// many delays or instants within the tick.
type PlantAt struct {
	p  *Plant
	T  *big.Rat
	td dd.Float
	c  *cascade // nil for the zero function
}

// At prepares the plant for one period. Errors as for Hold.
func (p *Plant) At(T *big.Rat) (*PlantAt, error) {
	if T == nil || T.Sign() <= 0 {
		return nil, &PeriodError{T}
	}
	a := &PlantAt{p: p, T: T, td: dd.FromRat(T)}
	if p.zero {
		return a, nil
	}
	if err := p.check(a.td); err != nil {
		return nil, err
	}
	e := expTable(p.nodes(a.td, 1))
	a.c = p.cascade(a.td, e, 1, func(c *cascade, k int) []dd.Complex {
		return []dd.Complex{e[k+1][0].Scale(c.pow[k])}
	})
	return a, nil
}

// Hold is the function Hold at this period.
func (a *PlantAt) Hold(delay *big.Rat) (zdomain.Model, error) {
	at, err := splitDelay(a.T, new(big.Rat).Add(delay, a.p.delay))
	if err != nil {
		return zdomain.Model{}, err
	}
	tf := a.hold(at, dd.FromRat(at.h))
	return sampled(tf, a.T)
}

// hold is the hold equivalent with h as at.h rounded.
func (a *PlantAt) hold(at place, h dd.Float) lti.TF {
	p, c := a.p, a.c
	if p.zero {
		return lti.TF{Period: a.td, Ticks: at.ticks}
	}
	w, feed := p.output(h, h.Sign() == 0)
	num := realPart(c.combine([]dd.Complex{dd.Real(feed)}, w))
	tf := lti.TF{Period: a.td, Ticks: at.ticks, Poles: c.d[:p.num:p.num], OriginPoles: len(p.lambda) - p.num + p.hidden}
	tf.Num, tf.OriginZeros = p.structure(num, c.d[:p.num], 1)
	if at.pole {
		tf.Poles = append(tf.Poles, dd.Real(dd.One.Div(a.td).Neg()))
		tf.Num = tf.Num.Scale(dd.One.Div(a.td))
	}
	return tf
}

// Along returns the hold equivalents for the delays
//
//	delay_i = from + x_i·(to − from),   0 < x_i < 1
//
// which must all lie between the same two whole numbers of ticks together with the plant's own dead time. The
// delays are formed in double-double arithmetic, 1e-32 of a tick; that saves the exact fractions of Hold. Errors
// as for Hold, and *DelayError where whole ticks lie between.
func (a *PlantAt) Along(from, to *big.Rat, x []float64) ([]lti.TF, error) {
	middle := new(big.Rat).Add(from, to)
	middle.Quo(middle, big.NewRat(2, 1))
	at, err := splitDelay(a.T, middle.Add(middle, a.p.delay))
	if err != nil {
		return nil, err
	}
	// h falls as the delay rises; both ends of the interval of delays lie within [0, T] of h.
	first := new(big.Rat).Add(at.h, middle)
	first.Sub(first, from).Sub(first, a.p.delay)
	span := new(big.Rat).Sub(from, to)
	last := new(big.Rat).Add(first, span)
	for _, h := range [2]*big.Rat{first, last} {
		if h.Sign() < 0 || h.Cmp(a.T) > 0 {
			return nil, &DelayError{"hold", new(big.Rat).Quo(span, a.T), "delays along an interval must stay within one tick"}
		}
	}
	h0, dh := dd.FromRat(first), dd.FromRat(span)
	out := make([]lti.TF, len(x))
	for i, f := range x {
		m, err := sampled(a.hold(at, h0.Add(dh.MulFloat(f))), a.T)
		if err != nil {
			return nil, err
		}
		out[i] = m.TF
	}
	return out, nil
}

// output returns the row C·e^{Ah} and C·Γ(h) + D.
func (p *Plant) output(h dd.Float, atTick bool) (w []dd.Complex, feed dd.Float) {
	if atTick {
		return p.c, p.feed
	}
	n := len(p.lambda)
	e, pow := expTable(p.nodes(h, 1)), powers(h, n)
	w = make([]dd.Complex, n)
	for k, ck := range p.c {
		if ck.IsZero() {
			continue
		}
		for j := range k + 1 {
			w[j] = w[j].Add(ck.Mul(e[k+1][j+1]).Scale(pow[k-j]))
		}
		feed = feed.Add(ck.Mul(e[k+1][0]).Scale(pow[k+1]).Re)
	}
	return w, feed.Add(p.feed)
}

// structure makes exact what the model decides at δ = 0. kept is the number of
// polynomial inputs the method reproduces (1: step, 2: step and ramp):
//
//	H(δ) = gain·δ^start + …     when start < kept, so Num(0) = gain·Π(−d_i)
//	H(δ) = O(δ^kept)            otherwise: kept zeros at the origin
func (p *Plant) structure(num poly.Poly, d []dd.Complex, kept int) (poly.Poly, int) {
	zeros := min(max(p.start, 0), kept)
	num = num[min(zeros, len(num)):]
	if p.start < kept && len(num) > 0 {
		num[0] = p.gain.Mul(negProduct(d))
	}
	for len(num) > 0 && num[0].Sign() == 0 {
		num, zeros = num[1:], zeros+1
	}
	return num, zeros + p.hidden
}

// place says where in the held interval the output is taken.
type place struct {
	ticks int
	h     *big.Rat // seconds after the last switching, in [0, T]
	pole  bool     // one pole at z = 0
}

// maxTicks bounds whole ticks of delay; a century of microseconds has more, a loop has not.
const maxTicks = math.MaxInt32

func splitDelay(T, total *big.Rat) (place, error) {
	n := new(big.Rat).Quo(total, T)
	q := new(big.Int).Div(n.Num(), n.Denom()) // floor: the denominator is positive
	eps := new(big.Rat).Sub(total, new(big.Rat).Mul(new(big.Rat).SetInt(q), T))
	h := new(big.Rat).Sub(T, eps)
	switch {
	case q.Sign() < 0 && q.Cmp(big.NewInt(-1)) != 0:
		return place{}, &DelayError{"hold", n, "an output can be had at most one tick ahead"}
	case q.Sign() < 0:
		return place{h: h}, nil
	case q.Cmp(big.NewInt(maxTicks)) > 0:
		return place{}, &DelayError{"hold", n, "too many ticks"}
	case eps.Sign() == 0:
		return place{ticks: int(q.Int64()), h: new(big.Rat)}, nil
	}
	return place{ticks: int(q.Int64()), h: h, pole: true}, nil
}

// sampled wraps tf, which must be finite.
func sampled(tf lti.TF, T *big.Rat) (zdomain.Model, error) {
	for _, v := range tf.Num {
		if !v.IsFinite() {
			return zdomain.Model{}, &RangeError{"the largest coefficient of the sampled model", math.Inf(1), math.MaxFloat64}
		}
	}
	for _, v := range tf.Poles {
		if !v.IsFinite() {
			return zdomain.Model{}, &RangeError{"the largest pole of the sampled model", math.Inf(1), math.MaxFloat64}
		}
	}
	return zdomain.Model{TF: tf, Period: new(big.Rat).Set(T)}, nil
}
