// Package zdomain holds sampled models in the variable δ = (z−1)/T: their
// poles, stability, error constants and margins.
package zdomain

import (
	"errors"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/lti"
)

// Model is a sampled transfer function at one period. TF.Period equals Period.
// Exact is the same function (without its delay of TF.Ticks) as an exact rational function of δ where
// there is one (a digital model, or a rational map of a continuous one), else nil.
type Model struct {
	TF     lti.TF
	Exact  *exact.Ratio
	Period *big.Rat // seconds
}

// ErrPeriod is a period that is not positive, or outside the range of double precision.
var ErrPeriod = errors.New("the period must be a positive number of seconds")

// FromZ returns the model of r(z), r given in z, at period T seconds. The
// substitution z = 1 + δT is exact and goes factor by factor, so that a root at
// z = 1 becomes an integrator (or a zero at the origin) however the polynomial was written:
// z² − 1.8·z + 0.8 is exactly δT·(δT + 0.2). Nothing is cancelled. Errors: ErrPeriod,
// *exact.SizeError, exact.ErrRange, exact.ErrRoots.
func FromZ(r exact.Ratio, t *big.Rat) (Model, error) {
	if t.Sign() <= 0 {
		return Model{}, ErrPeriod
	}
	if err := r.Check(); err != nil {
		return Model{}, err
	}
	one := big.NewRat(1, 1)
	delta, err := r.Moebius(t, one, new(big.Rat), one)
	if err != nil {
		return Model{}, err
	}
	return FromDelta(delta, t)
}

// FromDelta returns the model of r(δ), r given in δ = (z−1)/T, at period T seconds.
// Errors as for FromZ.
func FromDelta(r exact.Ratio, t *big.Rat) (Model, error) {
	period := dd.FromRat(t)
	if t.Sign() <= 0 || !period.IsFinite() || period.Sign() == 0 {
		return Model{}, ErrPeriod
	}
	if err := r.Check(); err != nil {
		return Model{}, err
	}
	num, poles, err := r.Numeric()
	if err != nil {
		return Model{}, err
	}
	return Model{
		TF: lti.TF{
			Num: num, Poles: poles,
			OriginZeros: r.OriginZeros, OriginPoles: r.OriginPoles,
			Period: period,
		},
		Exact:  &r,
		Period: new(big.Rat).Set(t),
	}, nil
}
