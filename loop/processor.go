package loop

import (
	"fmt"
	"math/big"
)

// processor reads what a tick costs and how much of it the loop may use.
func (r *reader) processor(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "processor", "cost", "budget", "clock", "cost_cycles")
	if broken {
		return
	}
	p := &Processor{Budget: big.NewRat(1, 1)}
	if v := s.get("budget"); v != nil {
		if b, ok := r.quantity(v, "budget", percentDim, "40 %"); ok {
			if b.Sign() <= 0 || b.Cmp(big.NewRat(100, 1)) > 0 {
				r.report(v.at, "budget is out of range", "above 0 %, up to 100 %")
			} else {
				l.Requirements = append(l.Requirements, budgetRequirement(b, v.at.line))
				p.Budget = b.Quo(b, big.NewRat(100, 1))
			}
		}
	}
	switch s.together("cost", "cost_cycles") {
	case "cost":
		if s.has("clock") {
			r.report(s.keyAt("clock"), "clock beside cost", "clock only with cost_cycles")
		}
		if c, ok := r.positiveSeconds(s.get("cost"), "cost"); ok {
			p.Cost = c
		}
	case "cost_cycles":
		p.Cost = r.cycles(s)
	default:
		if s.has("clock") {
			r.report(s.keyAt("clock"), "clock without cost_cycles", "cost_cycles: of a tick, beside clock")
		}
	}
	l.Processor = p
}

// budgetRequirement is what a budget asks for, in per cent: a gate holds the loop to it as to any other.
func budgetRequirement(percent *big.Rat, line int) Requirement {
	limit, _ := percent.Float64()
	return Requirement{Name: "processor_load", Op: "<=", Limit: limit, Text: fmt.Sprintf("processor_load <= %.6g %%", limit), Line: line}
}

// checkProcessor: something must say what a tick costs.
func (r *reader) checkProcessor(l *Loop, top *section) {
	if p := l.Processor; p != nil && p.Cost == nil && l.Timing.Compute.Sign() == 0 {
		r.report(within(top, "processor", ""), "processor has neither cost nor cost_cycles, and timing has no compute time in their place",
			"cost: 55 us, the processor time of a tick")
	}
}

// cycles is the time of cost_cycles at clock, seconds; nil when something is wrong.
func (r *reader) cycles(s *section) *big.Rat {
	clock, ok := r.clock(s.need("clock", "clock: of the processor, 72 MHz, beside cost_cycles"))
	n := s.get("cost_cycles")
	if n == nil {
		return nil
	}
	c, fine := r.constant(n, "cost_cycles")
	if fine && (c.Sign() <= 0 || c.Cmp(power10(15)) > 0) {
		r.report(n.at, "cost_cycles is out of range", "a number of processor cycles, above 0 and up to 1e15")
		fine = false
	}
	if !ok || !fine {
		return nil
	}
	cost := new(big.Rat).Quo(c, clock)
	if fault := checkSeconds(cost); fault != "" {
		r.report(n.at, "cost_cycles at this clock: "+fault, "a time from 1e-15 s to 1e9 s")
		return nil
	}
	return cost
}
