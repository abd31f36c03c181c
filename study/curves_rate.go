package study

import (
	"context"
	"fmt"
	"math"
	"math/big"

	"steadytick/loop"
)

const (
	sweepDecades = 1.2 // each way from the loop's own rate
	sweepPoints  = 37  // odd, so that the loop's own rate is one of them
)

// sweepPoint is the sampled loop at one rate; col is nil where it cannot run.
type sweepPoint struct {
	hz  float64
	col *Compare
}

// addRates fills margins and errors over the sample rate and the rate window. A
// controller given in z is valid at one rate only and has none of these.
func (v *Curves) addRates(ctx context.Context, l *loop.Loop, h held) error {
	own, _ := new(big.Rat).Inv(l.Timing.Period).Float64()
	v.RateHz = own
	if l.Controller.Digital {
		return nil
	}
	points, err := sweep(ctx, l, h)
	if err != nil {
		return err
	}
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
		if p.col == nil || !p.col.Sampled.Stable {
			continue
		}
		s := p.col.Sampled
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

// sweep analyses the loop at rates spaced evenly in logarithm.
func sweep(ctx context.Context, l *loop.Loop, h held) ([]sweepPoint, error) {
	own, _ := l.Timing.Period.Float64()
	points := make([]sweepPoint, sweepPoints)
	err := parallel(sweepPoints, func(i int) error {
		if err := ctx.Err(); err != nil {
			return err
		}
		x := 2*float64(i)/float64(sweepPoints-1) - 1
		period := l.Timing.Period
		if x != 0 {
			period = new(big.Rat).SetFloat64(own * math.Pow(10, -x*sweepDecades))
		}
		hz, _ := new(big.Rat).Inv(period).Float64()
		points[i] = sweepPoint{hz: hz, col: atRate(l, h, period)}
		return nil
	})
	return points, err
}

// atRate is the sampled loop at another period, without simulation; nil where the
// loop cannot run there.
func atRate(l *loop.Loop, h held, period *big.Rat) *Compare {
	other, problems := l.WithRate(period)
	if problems != nil {
		return nil
	}
	b, err := assembleSampled(other, h, other.Timing.Period, other.Timing.LoopDelay())
	if err != nil {
		return nil
	}
	a, err := analyze(b)
	if err != nil {
		return nil
	}
	T, _ := period.Float64()
	c := &Compare{PeriodS: T, Units: Units{l.Output, l.Effort}}
	if c.Sampled, err = a.column(other); err != nil {
		return nil
	}
	judge(other, c)
	return c
}

// windows turns the points into intervals: for "stable" and for each requirement that can be
// judged without simulation, the rates between the first and last neighbouring points that meet it.
func windows(l *loop.Loop, points []sweepPoint) []RateBar {
	bars := []RateBar{{Requirement: "stable", Intervals: intervals(points, func(c *Compare) bool { return c.Sampled.Stable })}}
	for i, r := range l.Requirements {
		judged := false
		meets := func(c *Compare) bool {
			q := c.Requirements[i]
			judged = judged || (q.Met != nil && c.Sampled.Stable)
			return q.Met != nil && *q.Met
		}
		in := intervals(points, meets)
		if judged {
			bars = append(bars, RateBar{Requirement: fmt.Sprintf("%s %s", r.Name, requirementText(r)), Intervals: in})
		}
	}
	return bars
}

func requirementText(r loop.Requirement) string { return fmt.Sprintf("%s %.4g", r.Op, r.Limit) }

func intervals(points []sweepPoint, meets func(*Compare) bool) [][2]float64 {
	var out [][2]float64
	open := false
	for _, p := range points {
		ok := p.col != nil && meets(p.col)
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
