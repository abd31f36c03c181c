package discretize

import (
	"math/big"

	"steadytick/internal/exact"
	"steadytick/internal/lti"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// Spec names a map for a controller.
type Spec struct {
	Method string   // one of Methods
	At     *big.Rat // prewarped: rad/s at which the map is exact; otherwise not used
}

type mapper func(m sdomain.Model, spec Spec, T *big.Rat) (zdomain.Model, error)

var mappers = map[string]mapper{
	"tustin":    tustin,
	"prewarped": prewarped,
	"matched":   matched,
	"forward":   forward,
	"backward":  backward,
	"hold":      holdMap,
	"triangle":  triangle,
}

// Methods returns the names of all maps, in the order of the documentation.
func Methods() []string {
	return []string{"tustin", "prewarped", "matched", "forward", "backward", "hold", "triangle"}
}

// Map returns the digital controller that spec makes of m at period T.
//
// Integrators stay exact poles at δ = 0 and complex pairs stay exact with every
// method. A dead time must be a whole number of ticks, because a digital controller
// can wait no other time. Errors: *MethodError, *AtError, *DelayError,
// *ImproperError, *PeriodError, *RangeError, *GrowthError, or the root finder's.
func Map(m sdomain.Model, spec Spec, T *big.Rat) (zdomain.Model, error) {
	f, ok := mappers[spec.Method]
	if !ok {
		return zdomain.Model{}, &MethodError{spec.Method}
	}
	if T == nil || T.Sign() <= 0 {
		return zdomain.Model{}, &PeriodError{T}
	}
	ticks, err := wholeTicks(spec.Method, m.Delay, T)
	if err != nil {
		return zdomain.Model{}, err
	}
	m.Delay = new(big.Rat)
	out, err := f(m, spec, T)
	if err != nil {
		return zdomain.Model{}, err
	}
	out.TF.Ticks += ticks
	return out, nil
}

func wholeTicks(method string, delay, T *big.Rat) (int, error) {
	if delay == nil || delay.Sign() == 0 {
		return 0, nil
	}
	n := new(big.Rat).Quo(delay, T)
	switch {
	case !n.IsInt() || n.Sign() < 0:
		return 0, &DelayError{method, n, "the dead time of a digital controller must be a whole number of ticks"}
	case n.Num().Cmp(big.NewInt(maxTicks)) > 0:
		return 0, &DelayError{method, n, "too many ticks"}
	}
	return int(n.Num().Int64()), nil
}

// substitute returns m with s = (a·δ + b)/(c·δ + d), exactly, factor by factor.
func substitute(method string, m sdomain.Model, a, b, c, d, T *big.Rat) (zdomain.Model, error) {
	r, err := m.Ratio.Moebius(a, b, c, d)
	if err != nil {
		return zdomain.Model{}, err
	}
	if !r.IsZero() && r.RelativeDegree() < 0 {
		return zdomain.Model{}, &ImproperError{Method: method, Excess: -r.RelativeDegree(), Mapped: true}
	}
	out, err := zdomain.FromDelta(r, T)
	if err != nil {
		return zdomain.Model{}, err
	}
	return sampledExact(out.TF, out.Exact, T)
}

func sampledExact(tf lti.TF, r *exact.Ratio, T *big.Rat) (zdomain.Model, error) {
	out, err := sampled(tf, T)
	out.Exact = r
	return out, err
}

// rat returns the integer n as a rational.
func rat(n int64) *big.Rat { return big.NewRat(n, 1) }
