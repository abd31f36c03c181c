package study

import (
	"context"
	"math"
	"math/big"
	"math/cmplx"
	"sync"

	"steadytick/loop"
)

// mapped is the loop with one controller map, at the file's own rate.
type mapped struct {
	name string
	loop *loop.Loop
}

// sweeper analyses a loop at many rates, under one map or several. Its methods may be called at the same time.
type sweeper struct {
	own   *loop.Loop // the map of the file or the flag
	held  held
	cont  *analyzed // the continuous loop; nil for a controller in z
	extra *big.Rat  // seconds added to the compute time, nil for none
	quick bool      // leave out what lives between the ticks
}

func newSweeper(l *loop.Loop, cont *analyzed) (*sweeper, error) {
	h, err := prepare(l)
	return &sweeper{own: l, held: h, cont: cont}, err
}

// ratePoint is the loop at one rate under one map.
type ratePoint struct {
	hz     float64
	period *big.Rat
	words  bool   // effort_noise and stuck_error are wanted, whether a requirement names them or not
	why    string // why it cannot run, "" where it does
	loop   *loop.Loop
	right  complex128 // the rightmost equivalent pole
	poles  int
	c      *Compare // Sampled is filled, without its lists of poles and crossings, and without what needs a simulation unless asked for
	ran    simulated
	lock   sync.Mutex // of ran and what belongs to it
}

// simulated says which figures of a run are wanted.
type simulated struct{ step, tracking bool }

func (s simulated) any() bool { return s.step || s.tracking }

// loopAt is the loop at another rate, with the extra compute time. The text says why it cannot run.
func (s *sweeper) loopAt(l *loop.Loop, period *big.Rat) (*loop.Loop, string) {
	if period.Cmp(l.Timing.Period) != 0 {
		other, problems := l.WithRate(period)
		if len(problems) > 0 {
			return nil, problems[0].Message
		}
		l = other
	}
	if s.extra == nil || s.extra.Sign() == 0 {
		return l, ""
	}
	late := *l
	late.Timing.Compute = new(big.Rat).Add(l.Timing.Compute, s.extra)
	work := new(big.Rat).Add(late.Timing.Conversion, late.Timing.Compute)
	if work.Cmp(period) > 0 || late.Timing.Update == loop.After && work.Cmp(late.Timing.UpdateAfter) > 0 {
		return nil, "conversion and compute take longer than there is time"
	}
	return &late, ""
}

// at analyses the loop at one period under each map, without simulation. What is behind the hold is shared.
func (s *sweeper) at(period *big.Rat, maps []mapped) []*ratePoint {
	out := make([]*ratePoint, len(maps))
	hz, _ := new(big.Rat).Inv(period).Float64()
	var shared *heldAt
	for i, m := range maps {
		p := &ratePoint{hz: hz, period: period}
		out[i] = p
		if p.loop, p.why = s.loopAt(m.loop, period); p.why != "" {
			continue
		}
		var err error
		if shared == nil {
			shared, err = s.held.at(period, p.loop.Timing.LoopDelay())
		}
		if err == nil {
			err = p.analyse(shared, !s.quick)
		}
		if err != nil {
			p.why = err.Error()
		}
	}
	return out
}

// analyse fills the point from what is behind the hold.
func (p *ratePoint) analyse(shared *heldAt, between bool) error {
	b, err := shared.assemble(p.loop)
	if err != nil {
		return err
	}
	a, err := analyze(b)
	if err != nil {
		return err
	}
	if p.poles = len(a.poles.Equivalent); p.poles > 0 {
		p.right = a.poles.Equivalent[0]
	}
	T, _ := p.loop.Timing.Period.Float64()
	p.c = &Compare{PeriodS: T, Units: Units{p.loop.Output, p.loop.Effort}}
	p.c.Sampled = a.figures(p.loop, between)
	p.c.Sampled.GainCrossings, p.c.Sampled.PhaseCrossings = nil, nil
	if p.words || requiresWords(p.loop) {
		return p.c.Sampled.addWords(context.Background(), p.loop, a) // a solution, not a run: nothing to interrupt
	}
	return nil
}

// again analyses the point once more: of the thousands of points of a sweep only the figures are kept.
func (p *ratePoint) again(h held) (*analyzed, error) {
	b, err := assembleSampled(p.loop, h, p.period, p.loop.Timing.LoopDelay())
	if err != nil {
		return nil, err
	}
	return analyze(b)
}

// runs tells whether the loop can run at this rate at all.
func (p *ratePoint) runs() bool { return p.why == "" && p.c != nil }

// stable tells whether it runs and is stable.
func (p *ratePoint) stable() bool { return p.runs() && p.c.Sampled.Stable }

// decay is how fast the slowest mode falls, 1/s: negative where it grows. Its sign is that of the verdict.
func (p *ratePoint) decay() float64 {
	d, _ := p.rawDecay()
	switch stable := p.c.Sampled.Stable; {
	case stable && !(d > 0):
		return math.SmallestNonzeroFloat64
	case !stable && !(d < 0):
		return -math.SmallestNonzeroFloat64
	}
	return d
}

// rawDecay is the same by the rightmost pole alone, and whether that pole is clearly off the boundary: by more than 1e-9 of its modulus.
func (p *ratePoint) rawDecay() (d float64, clear bool) {
	if p.poles == 0 {
		return math.Inf(1), true
	}
	return -real(p.right), math.Abs(real(p.right)) > 1e-9*cmplx.Abs(p.right)
}

// simulate adds the figures that need a run; nothing for a loop that is not stable. Runs are as long as those of compare.
func (s *sweeper) simulate(ctx context.Context, p *ratePoint, want simulated) error {
	p.lock.Lock()
	defer p.lock.Unlock()
	want.step, want.tracking = want.step && !p.ran.step, want.tracking && !p.ran.tracking
	if !p.stable() || !want.any() {
		return nil
	}
	a, err := p.again(s.held)
	if err != nil {
		return err
	}
	if want.step {
		if err := sampledTransient(ctx, p.loop, p.c, s.cont, a); err != nil {
			return err
		}
		p.c.Warnings, p.ran.step = nil, true
	}
	if want.tracking {
		if err := p.track(ctx, a); err != nil {
			return err
		}
		p.ran.tracking = true
	}
	return nil
}

// track fills peak and rms tracking error of moves and files.
func (p *ratePoint) track(ctx context.Context, a *analyzed) error {
	for i, in := range p.loop.Inputs {
		length, ok := endLength(p.loop, in)
		if !ok {
			continue
		}
		r, err := variant{loop: p.loop, run: a}.simulate(ctx, in, length)
		if err != nil {
			return err
		}
		if !r.diverged {
			s := &p.c.Sampled.Steady[i]
			s.PeakError, s.RMSError = r.peak, r.rms
		}
	}
	return nil
}

// has tells whether the figures of the runs that are needed are there.
func (p *ratePoint) has(need simulated) bool {
	p.lock.Lock()
	defer p.lock.Unlock()
	return (p.ran.step || !need.step) && (p.ran.tracking || !need.tracking)
}

// settlesSoon tells whether the step figures of a point take a run of ordinary length. Beside the end of stability they do not, and
// say nothing there.
func (s *sweeper) settlesSoon(p *ratePoint) (bool, error) {
	if !p.stable() {
		return false, nil
	}
	a, err := p.again(s.held)
	if err != nil {
		return false, err
	}
	_, length := stepRun(p.loop, s.cont, a)
	return length <= mostTicksRun*p.c.PeriodS, nil
}
