package study

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/big"
	"sync"

	"steadytick/loop"
)

// RateOptions steers the search for sample rates.
type RateOptions struct {
	From, To *big.Rat // Hz; nil: as the loop file says, else found
	Points   int      // rates looked at to begin with, 0: 60 a decade
	AllMaps  bool     // every controller map side by side
	Curves   bool     // fill Rate.Curves for the report
	Version  string
	Progress func(what string, done, all int) // nil: silent; not called from two goroutines at once
}

// ErrDigitalRate says that a controller in z has no other rate.
var ErrDigitalRate = errors.New("the controller is given in z, so it is valid at one rate only; rate needs a controller in s with a map")

// RunRate finds the sample rates that meet the requirements of the loop file. An empty window is a result. It returns
// an error when the loop cannot be analysed at all, and ErrDigitalRate for a controller in z.
func RunRate(ctx context.Context, l *loop.Loop, o RateOptions) (*Rate, error) {
	if l.Controller.Digital {
		return nil, ErrDigitalRate
	}
	r := &Rate{
		Schema: "steadytick/rate/1", Loop: l.Name, Map: mapName(l), Units: Units{l.Output, l.Effort},
		FileRateHz: 1 / seconds(l.Timing.Period), Maps: []MapWindow{}, Candidates: []Candidate{}, Warnings: []Warning{},
		DelayLedger: []LedgerItem{}, LoopFile: string(l.Source), File: l.File, Version: o.Version,
	}
	job, err := newRateJob(ctx, l, r, o)
	if err != nil {
		return nil, err
	}
	for _, step := range []func() error{
		job.search, job.windows, job.choose, job.explain, job.compareMaps, job.candidates,
		job.computeEffect, job.rulesOfThumb, job.fold, job.answer, job.draw,
	} {
		if err := step(); err != nil {
			return nil, err
		}
	}
	return r, nil
}

// rateJob is the work of one RunRate.
type rateJob struct {
	ctx      context.Context
	l        *loop.Loop
	r        *Rate
	o        RateOptions
	cont     *analyzed
	sweep    *sweeper
	list     []*constraint
	unjudged []loop.Requirement
	lo, hi   float64
	scan     *rateScan
	others   []*rateScan  // of the other maps
	spans    [][]rateSpan // of each constraint
	window   []rateSpan
	judged   map[*constraint]bool // what judges has found
	lock     sync.Mutex           // of judged
}

func newRateJob(ctx context.Context, l *loop.Loop, r *Rate, o RateOptions) (*rateJob, error) {
	b, err := assembleContinuous(l)
	if err != nil {
		return nil, err
	}
	cont, err := analyze(b)
	if err != nil {
		return nil, err
	}
	j := &rateJob{ctx: ctx, l: l, r: r, o: o, cont: cont, judged: map[*constraint]bool{}}
	if j.sweep, err = newSweeper(l, cont); err != nil {
		return nil, err
	}
	j.list, j.unjudged = constraints(l)
	j.sweep.quick = !o.Curves
	for _, c := range j.list {
		j.sweep.quick = j.sweep.quick && !betweenTicks(c.name)
	}
	if !cont.stable {
		r.warn("continuous_unstable", "the continuous loop is unstable: a rate at which the sampled loop is stable is a coincidence to be looked at with care; mend the design first")
	}
	return j, nil
}

func (r *Rate) warn(code, format string, args ...any) {
	r.Warnings = append(r.Warnings, Warning{code, fmt.Sprintf(format, args...)})
}

// progress hands a step of the work to the caller; the counts of several goroutines come in any order.
func (j *rateJob) progress(what string, all int) func(done int) {
	if j.o.Progress == nil {
		return func(int) {}
	}
	var last counter
	return func(done int) {
		last.lock.Lock()
		defer last.lock.Unlock()
		if done > last.n {
			last.n = done
			j.o.Progress(what, done, all)
		}
	}
}

// widest is how many decades the search goes on below its first end while every requirement is still met there.
const widest = 3

// search looks at the rates of the range. Where the range was found by the program and everything is met at its slow end, it
// goes on below.
func (j *rateJob) search() error {
	var note string
	j.lo, j.hi, note = searchRange(j.l, j.cont, j.o)
	maps := []mapped{{j.r.Map, j.l}}
	if j.o.AllMaps {
		maps = append(maps, j.otherMaps()...)
	}
	asked := j.o.From != nil || j.l.Search != nil && j.l.Search.From != nil
	for range widest + 1 {
		grid := j.sweep.rateGrid(j.lo, j.hi, j.o.Points, j.r.FileRateHz)
		scans, err := j.sweep.scanRates(j.ctx, maps, grid, j.list, j.progress("rates", len(grid)))
		if err != nil {
			return err
		}
		j.scan, j.others = scans[0], scans[1:]
		first := j.scan.points[0]
		if asked || !first.stable() || j.lo <= slowestRate {
			break
		}
		if err := j.sweep.simulate(j.ctx, first, wanted(j.list)); err != nil {
			return err
		}
		if len(j.failing(first)) > 0 {
			break
		}
		j.lo = math.Max(j.lo/10, slowestRate)
		note += "; on to " + hertzText(j.lo) + ", for all is met below"
	}
	n := (len(j.scan.points) + simulatedEvery - 1) / simulatedEvery
	if err := j.scan.simulateGrid(j.progress("simulations", n)); err != nil {
		return err
	}
	j.r.SearchedHz, j.r.SearchNote = [2]float64{j.lo, j.hi}, note
	return nil
}

// failing are the constraints that are not met at a point, judged or not.
func (j *rateJob) failing(p *ratePoint) []*constraint {
	var out []*constraint
	for _, c := range j.list {
		if s := c.slack(p); !met(s) && !math.IsNaN(s) {
			out = append(out, c)
		}
	}
	return out
}

// failures are the judged constraints that are not met at a point.
func (j *rateJob) failures(p *ratePoint) []*constraint {
	var out []*constraint
	for _, c := range j.list {
		if j.judges(c) && !met(c.slack(p)) {
			out = append(out, c)
		}
	}
	return out
}

// judges tells whether the constraint has a figure at any rate looked at.
func (j *rateJob) judges(c *constraint) bool {
	if c.implied {
		return true
	}
	j.lock.Lock()
	defer j.lock.Unlock()
	known, ok := j.judged[c]
	if !ok {
		known = j.scan.judges(c)
		j.judged[c] = known
	}
	return known
}

// judges tells whether a constraint has a figure at some point; where the loop is stable nowhere, nothing is met, which is a judgement too.
func (w *rateScan) judges(c *constraint) bool {
	stable := false
	for _, p := range w.points {
		stable = stable || p.stable()
	}
	if !stable {
		return true
	}
	for _, p := range w.points {
		if !p.stable() {
			continue
		}
		if f, why := c.figure(p); f.OK && why == "" {
			return true
		}
	}
	return false
}

// mapName names the maps of the controller's model or pid, one after another.
func mapName(l *loop.Loop) string {
	var names []string
	seen := map[string]bool{}
	for _, t := range l.Controller.Terms {
		for _, p := range t.Parts {
			if p.Continuous == nil || p.Map.Method == "" || p.Continuous.Ratio.Order() == 0 && len(p.Continuous.Ratio.Num) == 0 {
				continue
			}
			name := p.Map.Method
			if p.Map.At != nil {
				w, _ := p.Map.At.Float64()
				name += " at " + hertzText(w/(2*math.Pi))
			}
			if !seen[name] {
				seen[name] = true
				names = append(names, name)
			}
		}
	}
	if len(names) == 0 {
		return "none needed"
	}
	out := names[0]
	for _, n := range names[1:] {
		out += ", " + n
	}
	return out
}
