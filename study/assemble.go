package study

import (
	"errors"
	"fmt"
	"math/big"

	"steadytick/discretize"
	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/loop"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// block is one column's transfer functions, ready for analysis.
type block struct {
	sys   lti.System
	open  lti.TF       // L = Cm·Gm
	outer []dd.Complex // poles of prefilter and feedforward: outside the loop, but in the machine

	period *big.Rat // nil in the continuous column
	delay  *big.Rat // sample to update, seconds; nil in the continuous column
	held   *heldAt  // sampled column

	// What the simulation runs.
	terms       []weighted
	prefilter   *zdomain.Model
	feedforward *zdomain.Model
}

// weighted is a controller term after its map.
type weighted struct {
	model  zdomain.Model
	weight *big.Rat
}

// errNoContinuous says that a digital-only controller has no continuous twin.
var errNoContinuous = errors.New("the controller is given in z only, so there is no continuous controller to compare with")

// continuousTerms multiplies the parts of each term and joins the terms: Cm
// (acting on m) and Cr (acting on r), exact.
func continuousTerms(c loop.Controller) (cm, cr sdomain.Model, err error) {
	if c.Digital {
		return cm, cr, errNoContinuous
	}
	cm, cr = sdomain.Const(new(big.Rat)), sdomain.Const(new(big.Rat))
	for _, t := range c.Terms {
		m := sdomain.Const(big.NewRat(1, 1))
		for _, p := range t.Parts {
			if m, err = m.Mul(*p.Continuous); err != nil {
				return cm, cr, fmt.Errorf("controller term %s: %w", t.Name, err)
			}
		}
		if cm, err = cm.Add(m); err != nil {
			return cm, cr, fmt.Errorf("controller term %s: %w", t.Name, err)
		}
		w, err := m.Mul(sdomain.Const(t.Weight))
		if err != nil {
			return cm, cr, err
		}
		if cr, err = cr.Add(w); err != nil {
			return cm, cr, fmt.Errorf("controller term %s: %w", t.Name, err)
		}
	}
	if c.Prefilter != nil {
		if cr, err = cr.Mul(*c.Prefilter.Continuous); err != nil {
			return cm, cr, fmt.Errorf("prefilter: %w", err)
		}
	}
	if c.Feedforward != nil {
		if cr, err = cr.Add(*c.Feedforward.Continuous); err != nil {
			return cm, cr, fmt.Errorf("feedforward: %w", err)
		}
	}
	return cm, cr, nil
}

// oneDegree tells whether the controller acts on r − m alone.
func oneDegree(c loop.Controller) bool {
	if c.Prefilter != nil || c.Feedforward != nil {
		return false
	}
	one := big.NewRat(1, 1)
	for _, t := range c.Terms {
		if t.Weight.Cmp(one) != 0 {
			return false
		}
	}
	return true
}

// assembleContinuous builds the continuous column: the loop as designed.
func assembleContinuous(l *loop.Loop) (*block, error) {
	cm, cr, err := continuousTerms(l.Controller)
	if err != nil {
		return nil, err
	}
	pm, err := l.Plant.Mul(l.Sensor.Model)
	if err != nil {
		return nil, err
	}
	b := &block{}
	for _, x := range []struct {
		m   sdomain.Model
		dst *lti.TF
	}{{cm, &b.sys.Cm}, {cr, &b.sys.Cr}, {l.Plant, &b.sys.Gy}, {pm, &b.sys.Gm}} {
		if *x.dst, err = x.m.TF(); err != nil {
			return nil, err
		}
	}
	b.finish(l, &cm.Ratio, &cr.Ratio)
	for _, p := range []*loop.Part{l.Controller.Prefilter, l.Controller.Feedforward} {
		if p == nil {
			continue
		}
		tf, err := p.Continuous.TF()
		if err != nil {
			return nil, err
		}
		b.outer = append(b.outer, allPoles(tf)...)
	}
	return b, nil
}

// assembleSampled builds the sampled column at period T with the given time from
// sample to update, both exact seconds.
func assembleSampled(l *loop.Loop, h held, period, delay *big.Rat) (*block, error) {
	a, err := h.at(period, delay)
	if err != nil {
		return nil, err
	}
	return a.assemble(l)
}

// assemble closes the loop around what is behind the hold with the controller of l.
func (a *heldAt) assemble(l *loop.Loop) (*block, error) {
	period := a.period
	b := &block{period: period, delay: a.delay, held: a}
	b.sys.Gy, b.sys.Gm = a.gy, a.gm
	for _, t := range l.Controller.Terms {
		m, err := mapTerm(t, period)
		if err != nil {
			return nil, fmt.Errorf("controller term %s: %w", t.Name, err)
		}
		b.terms = append(b.terms, weighted{m, t.Weight})
	}
	for _, x := range []struct {
		part *loop.Part
		dst  **zdomain.Model
		name string
	}{{l.Controller.Prefilter, &b.prefilter, "prefilter"}, {l.Controller.Feedforward, &b.feedforward, "feedforward"}} {
		if x.part == nil {
			continue
		}
		m, err := mapPart(*x.part, period)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", x.name, err)
		}
		*x.dst = &m
	}
	cm, cr, err := joinTerms(b, oneDegree(l.Controller))
	if err != nil {
		return nil, err
	}
	b.sys.Cm, b.sys.Cr = cm.TF, cr.TF
	b.finish(l, atRest(l, cm.Exact, false), atRest(l, cr.Exact, true))
	for _, m := range []*zdomain.Model{b.prefilter, b.feedforward} {
		if m != nil {
			b.outer = append(b.outer, allPoles(m.TF)...)
		}
	}
	return b, nil
}

// mapPart makes one controller part digital.
func mapPart(p loop.Part, period *big.Rat) (zdomain.Model, error) {
	if p.Digital != nil {
		return zdomain.FromZ(*p.Digital, period)
	}
	return discretize.Map(*p.Continuous, discretize.Spec{Method: p.Map.Method, At: p.Map.At}, period)
}

// mapTerm maps the parts of a term and multiplies them.
func mapTerm(t loop.Term, period *big.Rat) (out zdomain.Model, err error) {
	for i, p := range t.Parts {
		m, err := mapPart(p, period)
		if err != nil {
			return out, err
		}
		if i == 0 {
			out = m
		} else if out, err = out.Mul(m); err != nil {
			return out, err
		}
	}
	return out, nil
}

// joinTerms adds the mapped terms: Cm, and Cr with weights, prefilter and feedforward.
func joinTerms(b *block, one bool) (cm, cr zdomain.Model, err error) {
	if len(b.terms) == 0 {
		return cm, cr, errors.New("the controller has no terms")
	}
	for i, t := range b.terms {
		w := t.model
		if !one {
			if w, err = t.model.Scale(t.weight); err != nil {
				return cm, cr, err
			}
		}
		if i == 0 {
			cm, cr = t.model, w
			continue
		}
		if cm, err = cm.Add(t.model); err != nil {
			return cm, cr, err
		}
		if one {
			continue
		}
		if cr, err = cr.Add(w); err != nil {
			return cm, cr, err
		}
	}
	if one {
		return cm, cm, nil
	}
	if b.prefilter != nil {
		if cr, err = cr.Mul(*b.prefilter); err != nil {
			return cm, cr, fmt.Errorf("prefilter: %w", err)
		}
	}
	if b.feedforward != nil {
		if cr, err = cr.Add(*b.feedforward); err != nil {
			return cm, cr, fmt.Errorf("feedforward: %w", err)
		}
	}
	return cm, cr, nil
}
