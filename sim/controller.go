package sim

import (
	"errors"
	"fmt"
	"math/big"

	"steadytick/zdomain"
)

// AntiWindup is what the integrators of a controller do while its effort is limited.
type AntiWindup int

const (
	// NoAntiWindup lets them run.
	NoAntiWindup AntiWindup = iota
	// Clamp stops them while the effort is limited and what they would integrate drives
	// it further out.
	Clamp
	// Tracking adds (u − v)/TrackingTime to what the last one integrates, u the held effort
	// and v the computed one (back-calculation). Further integrators in front of it are clamped.
	Tracking
)

// Term is one summand of a controller,
//
//	Model · (Weight·F·r − measurement)
//
// with F the prefilter and the measurement the output number Read of those that the task reads.
type Term struct {
	Model  zdomain.Model
	Weight float64
	Read   int
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
	trackGain              float64 // T/(TrackingTime·number of integrating terms)
}

// block is one model of a controller: a chain, integrators taken out of it, a delay.
type block struct {
	chain *chain
	rho   []float64 // integrators: Σ rho[j]/δ^(j+1)
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
	period, _ := cfg.Period.Float64()
	c := &Controller{period: period, exactPeriod: new(big.Rat).Set(cfg.Period), antiWindup: cfg.AntiWindup}
	integrating := 0
	for _, t := range cfg.Terms {
		b, err := c.block(t.Model, cfg.AntiWindup != NoAntiWindup)
		if err != nil {
			return nil, err
		}
		if !finite([]float64{t.Weight}) || t.Read < 0 {
			return nil, errors.New("a term needs a finite weight and a measurement")
		}
		if len(b.rho) > 0 {
			integrating++
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
	return c, nil
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
