package study

import (
	"context"
	"math"
	"math/big"
	"slices"
	"sync"
)

// rateScan is the loop under one map over a range of rates: the points looked at, and those added where a bound is refined.
type rateScan struct {
	ctx    context.Context
	s      *sweeper
	m      mapped
	list   []*constraint
	points []*ratePoint // ascending, of the grid

	lock  sync.Mutex
	known map[float64]*ratePoint // by rate
}

// simulatedEvery: figures that need a simulation are looked at on every third rate of the grid, neighbours 12 % apart.
const simulatedEvery = 3

// scanRates analyses the loop under each map at each rate, in parallel over the rates. step is told how many are done.
func (s *sweeper) scanRates(ctx context.Context, maps []mapped, grid []float64, list []*constraint, step func(done int)) ([]*rateScan, error) {
	all := make([][]*ratePoint, len(grid))
	var count counter
	err := parallel(len(grid), func(i int) error {
		if err := ctx.Err(); err != nil {
			return err
		}
		all[i] = s.at(shortPeriodOf(grid[i]), maps)
		step(count.next())
		return nil
	})
	if err != nil {
		return nil, err
	}
	out := make([]*rateScan, len(maps))
	for k, m := range maps {
		w := &rateScan{ctx: ctx, s: s, m: m, list: list, known: map[float64]*ratePoint{}}
		for i := range grid {
			w.points = append(w.points, all[i][k])
			w.known[all[i][k].hz] = all[i][k]
		}
		out[k] = w
	}
	return out, nil
}

// counter counts from several goroutines.
type counter struct {
	lock sync.Mutex
	n    int
}

func (c *counter) next() int {
	c.lock.Lock()
	defer c.lock.Unlock()
	c.n++
	return c.n
}

// wanted joins what the constraints need.
func wanted(list []*constraint) (want simulated) {
	for _, c := range list {
		want.step = want.step || c.needs.step
		want.tracking = want.tracking || c.needs.tracking
	}
	return want
}

// simulateGrid runs the simulations that the constraints need on every third point.
func (w *rateScan) simulateGrid(step func(done int)) error {
	want := wanted(w.list)
	if !want.any() {
		return nil
	}
	chosen := w.worthRunning()
	var count counter
	return parallel(len(chosen), func(i int) error {
		if err := w.ctx.Err(); err != nil {
			return err
		}
		err := w.s.simulate(w.ctx, chosen[i], want)
		step(count.next())
		return err
	})
}

// sparseRatio: where a run takes more ticks than an ordinary one, every figure is that of T → 0 but for its last digits, and rates this ratio
// apart are enough.
const sparseRatio = 3

// worthRunning are the points that are simulated: every third, fewer where runs are long, and the last.
func (w *rateScan) worthRunning() []*ratePoint {
	_, length := stepRun(w.m.loop, w.s.cont, nil)
	var out []*ratePoint
	last := 0.0
	for i, p := range w.points {
		long := p.hz*length > mostTicksRun && p.hz < sparseRatio*last
		if i%simulatedEvery == 0 && !long || i == len(w.points)-1 {
			out, last = append(out, p), p.hz
		}
	}
	return out
}

// at is the loop at a rate, with the figures that a constraint needs.
func (w *rateScan) at(hz float64, want simulated) (*ratePoint, error) {
	return w.atPeriod(hz, periodOf(hz), want)
}

func (w *rateScan) atPeriod(hz float64, period *big.Rat, want simulated) (*ratePoint, error) {
	if err := w.ctx.Err(); err != nil {
		return nil, err
	}
	w.lock.Lock()
	p := w.known[hz]
	w.lock.Unlock()
	if p == nil {
		p = w.s.at(period, []mapped{w.m})[0]
		p.hz = hz
	}
	var err error
	if want.any() {
		err = w.s.simulate(w.ctx, p, want)
	}
	w.lock.Lock()
	w.known[hz] = p
	w.lock.Unlock()
	return p, err
}

// fewInside: a stable interval with fewer rates of the grid in it gets this many more, so that the other figures, which an unstable
// loop does not have, are seen inside of a narrow island.
const fewInside = 9

// lookInside adds points to the grid inside of narrow intervals.
func (w *rateScan) lookInside(spans []rateSpan) error {
	first, last := w.points[0].hz, w.points[len(w.points)-1].hz
	want := wanted(w.list)
	for _, s := range spans {
		low, high := math.Max(s.low, first), math.Min(s.high, last)
		n := 0
		for _, p := range w.points {
			if p.hz >= low && p.hz <= high {
				n++
			}
		}
		if n >= fewInside || !(low < high) {
			continue
		}
		for i := range fewInside {
			p, err := w.at(low*math.Pow(high/low, (float64(i)+0.5)/fewInside), want)
			if err != nil {
				return err
			}
			if !slices.Contains(w.points, p) {
				w.points = append(w.points, p)
			}
		}
	}
	slices.SortFunc(w.points, func(a, b *ratePoint) int { return compareFloat(a.hz, b.hz) })
	return nil
}

// sample is a constraint's slack at one rate.
type sample struct{ hz, slack float64 }

// samples are the slacks of a constraint at the points of the grid that have its figure.
func (w *rateScan) samples(c *constraint) []sample {
	var out []sample
	for _, p := range w.points {
		if p.stable() && !p.has(c.needs) {
			continue
		}
		out = append(out, sample{p.hz, c.slack(p)})
	}
	return out
}

// slackAt is the slack at a rate.
func (w *rateScan) slackAt(c *constraint, hz float64) (float64, error) {
	p, err := w.at(hz, c.needs)
	if err != nil {
		return math.NaN(), err
	}
	return c.slack(p), nil
}
