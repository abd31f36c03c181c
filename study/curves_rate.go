package study

import (
	"context"
	"fmt"
	"math"

	"steadytick/loop"
)

const (
	sweepDecades = 1.2 // each way from the loop's own rate
	sweepPoints  = 37  // odd, so that the loop's own rate is one of them
)

// addRates fills margins and errors over the sample rate and the rate window. A
// controller given in z is valid at one rate only and has none of these.
func (v *Curves) addRates(ctx context.Context, l *loop.Loop, cont *analyzed) error {
	own := 1 / seconds(l.Timing.Period)
	v.RateHz = own
	if l.Controller.Digital {
		return nil
	}
	s, err := newSweeper(l, cont)
	if err != nil {
		return err
	}
	grid := make([]float64, sweepPoints)
	for i := range grid {
		x := 2*float64(i)/float64(sweepPoints-1) - 1
		grid[i] = own * math.Pow(10, x*sweepDecades)
	}
	list, _ := constraints(l)
	scans, err := s.scanRates(ctx, []mapped{{mapName(l), l}}, grid, list, func(int) {})
	if err != nil {
		return err
	}
	points := scans[0].points
	phase := Curve{Name: "phase margin"}
	errs := map[int]*Curve{}
	var order []int
	for i, in := range l.Inputs {
		switch in.Kind {
		case "step", "ramp", "parabola", "sine":
			errs[i] = &Curve{Name: inputTitle(l, in)}
			order = append(order, i)
		}
	}
	for _, p := range points {
		if !p.stable() {
			continue
		}
		s := p.c.Sampled
		if f := s.PhaseMarginDeg; f.OK && !math.IsInf(f.Value, 0) {
			phase.X, phase.Y = append(phase.X, p.hz), append(phase.Y, f.Value)
		}
		for _, i := range order {
			if e := errorMagnitude(s.Steady[i].WorstError); !math.IsNaN(e) {
				errs[i].X, errs[i].Y = append(errs[i].X, p.hz), append(errs[i].Y, e)
			}
		}
	}
	v.PhaseMarginOverRate = []Curve{phase}
	for _, i := range order {
		if len(errs[i].X) > 0 {
			v.ErrorOverRate = append(v.ErrorOverRate, *errs[i])
		}
	}
	v.RateWindow = windows(l, points)
	return nil
}

// windows turns the points into intervals: for "stable" and for each requirement that can be
// judged without simulation, the rates between the first and last neighbouring points that meet it. The command rate finds
// the bounds themselves.
func windows(l *loop.Loop, points []*ratePoint) []RateBar {
	bars := []RateBar{{Requirement: "stable", Intervals: intervals(points, (*ratePoint).stable)}}
	for _, r := range l.Requirements {
		c := constraintOf(l, r)
		if !judged(r.Name) || c.needs.any() {
			continue
		}
		known := false
		in := intervals(points, func(p *ratePoint) bool {
			s := c.slack(p)
			known = known || p.stable() && !math.IsNaN(s)
			return met(s)
		})
		if known {
			bars = append(bars, RateBar{Requirement: fmt.Sprintf("%s %s", r.Name, requirementText(r)), Intervals: in})
		}
	}
	return bars
}

func requirementText(r loop.Requirement) string { return fmt.Sprintf("%s %.4g", r.Op, r.Limit) }

func intervals(points []*ratePoint, meets func(*ratePoint) bool) [][2]float64 {
	var out [][2]float64
	open := false
	for _, p := range points {
		ok := meets(p)
		switch {
		case ok && !open:
			out = append(out, [2]float64{p.hz, p.hz})
		case ok:
			out[len(out)-1][1] = p.hz
		}
		open = ok
	}
	return out
}
