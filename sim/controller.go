package sim

import (
	"errors"
	"fmt"
	"math/big"

	"steadytick/zdomain"
)

// AntiWindup is what the integrators of a controller do while its effort is limited. Textbook rules, for an
// integrator I with the input ρ·e and v the computed effort, u the one held after limits and slew:
//
//	I ← I + T·ρ·((1−α)·e before + α·e)     α = 0 forward, ½ tustin, 1 backward
//
// With α = 0 the effort is computed first and I after it; else I first, for this tick's effort.
type AntiWindup int

const (
	// NoAntiWindup lets them run.
	NoAntiWindup AntiWindup = iota
	// StopOutward undoes the increment of a tick whose effort is limited and driven further out by it.
	StopOutward
	// Stop undoes the increment of every tick whose effort is limited.
	Stop
	// Clamp keeps each integrator within bounds of its own, before its value is used.
	Clamp
	// Tracking adds (u − v)/TrackingTime to what the last one integrates (back-calculation), after the effort.
	// Further integrators in front of it follow StopOutward.
	Tracking
)

// Term is one summand of a controller,
//
//	Model · (Weight·F·r − measurement)
//
// with F the prefilter and the measurement the output number Read of those that the task reads. Ahead is
// the α of its map (see AntiWindup), 0 where there is none.
type Term struct {
	Model  zdomain.Model
	Weight float64
	Read   int
	Ahead  float64
}

// ControllerConfig describes a sampled controller,
//
//	v = Σ Term + Feedforward·r
//
// all models at the same Period. Prefilter nil is 1, Feedforward nil is 0.
type ControllerConfig struct {
	Period       *big.Rat
	Terms        []Term
	Prefilter    *zdomain.Model
	Feedforward  *zdomain.Model
	AntiWindup   AntiWindup
	TrackingTime float64 // seconds, for Tracking, positive
	Low, High    float64 // bounds of each integrator, for Clamp
	// Timed, when set, is the same controller as parts that can be computed with the measured time
	// between two ticks (see Task.MeasuredPeriod).
	Timed *TimedConfig
}

// Controller is a difference equation in δ, ready to run; immutable, each run starts its own
// state. Whole ticks of delay in a model are queues.
type Controller struct {
	period                 float64
	exactPeriod            *big.Rat
	terms                  []block
	weights                []float64
	reads                  []int
	prefilter, feedforward *block
	antiWindup             AntiWindup
	trackGain              float64          // T/(TrackingTime·number of integrating terms)
	low, high              float64          // for Clamp
	timed                  *timedController // for Task.MeasuredPeriod; nil: the period is taken as it should be
}

// block is one model of a controller: a chain, integrators taken out of it, a delay.
type block struct {
	chain *chain
	rho   []float64 // integrators: Σ rho[j]/δ^(j+1)
	ahead float64   // what the integrator gains by this tick's input before it is used: α·T·ρ[0]
	ticks int
}

// NewController checks and prepares a controller. Errors: no term, a model at another period,
// ErrImproper, ErrRange.
func NewController(cfg ControllerConfig) (*Controller, error) {
	if cfg.Period == nil || cfg.Period.Sign() <= 0 {
		return nil, errors.New("a controller needs a positive period")
	}
	if cfg.AntiWindup == Tracking && !(cfg.TrackingTime > 0) {
		return nil, errors.New("tracking needs a positive tracking time")
	}
	if cfg.AntiWindup == Clamp && !(cfg.Low < cfg.High && finite([]float64{cfg.Low, cfg.High})) {
		return nil, errors.New("a clamped integrator needs bounds, the lower first")
	}
	period, _ := cfg.Period.Float64()
	c := &Controller{
		period: period, exactPeriod: new(big.Rat).Set(cfg.Period), antiWindup: cfg.AntiWindup,
		low: cfg.Low, high: cfg.High,
	}
	integrating := 0
	for _, t := range cfg.Terms {
		b, err := c.block(t.Model, cfg.AntiWindup != NoAntiWindup)
		if err != nil {
			return nil, err
		}
		if !finite([]float64{t.Weight}) || t.Read < 0 || !(t.Ahead >= 0 && t.Ahead <= 1) {
			return nil, errors.New("a term needs a finite weight, a measurement, and a share ahead from 0 to 1")
		}
		if len(b.rho) > 0 {
			integrating++
			b.ahead = t.Ahead * period * b.rho[0]
		}
		c.terms = append(c.terms, *b)
		c.weights = append(c.weights, t.Weight)
		c.reads = append(c.reads, t.Read)
	}
	if cfg.AntiWindup == Tracking && integrating > 0 {
		c.trackGain = period / (cfg.TrackingTime * float64(integrating))
	}
	for _, p := range []struct {
		from *zdomain.Model
		to   **block
	}{{cfg.Prefilter, &c.prefilter}, {cfg.Feedforward, &c.feedforward}} {
		if p.from == nil {
			continue
		}
		b, err := c.block(*p.from, false)
		if err != nil {
			return nil, err
		}
		*p.to = b
	}
	var err error
	if cfg.Timed != nil {
		c.timed, err = newTimed(cfg.Timed, &cfg)
	}
	return c, err
}

func (c *Controller) block(m zdomain.Model, split bool) (*block, error) {
	if m.Period == nil || m.Period.Cmp(c.exactPeriod) != 0 {
		return nil, fmt.Errorf("a model of the controller is for another period than %s s", c.exactPeriod.RatString())
	}
	g := m.TF
	b := &block{ticks: g.Ticks}
	if split {
		b.rho, g = splitIntegrators(g)
	}
	var err error
	if len(b.rho) == 0 && m.Exact != nil {
		b.chain, err = realizeExact(g, *m.Exact)
	} else {
		b.chain, err = realize(g, nil)
	}
	return b, err
}
