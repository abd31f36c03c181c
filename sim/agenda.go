package sim

import (
	"fmt"
	"math"

	"steadytick/internal/dd"
)

// agenda is the time-line of tasks with jitter, or with no short common period: the next
// instant is sought each time. Instants are k·T + offset (+ jitter) in double-double, and those
// nearer to each other than 1e-20 of the time are one: far above the rounding (1e-31), far below any
// distance that is meant.
type agenda struct {
	e       *engine
	end     dd.Float
	tick    int64 // the next point at a tick of the first task
	periods []dd.Float
	delays  []dd.Float // of the channels
	clocks  []clock
	out     instant
}

// clock is where a task stands.
type clock struct {
	offset, delay dd.Float
	next          int64      // number of the next sample
	at            dd.Float   // its instant
	due           []dd.Float // updates on their way, from the one of sample number first
	first         int64
}

func newAgenda(e *engine) (*agenda, error) {
	a := &agenda{e: e}
	for i := range e.tasks {
		t := &e.tasks[i]
		a.periods = append(a.periods, dd.FromRat(t.Period))
		a.clocks = append(a.clocks, clock{offset: dd.FromRat(orZero(t.Offset)), delay: dd.FromRat(orZero(t.Delay))})
		t.skip, t.applied = 0, 0
	}
	for _, c := range e.cfg.System.channels {
		a.delays = append(a.delays, dd.FromRat(c.Delay))
	}
	for k := range e.layout.held {
		e.layout.held[k].next = 0
	}
	a.end = a.periods[0].Mul(dd.New(float64(e.cfg.Ticks)))
	for i := range a.clocks {
		a.clocks[i].at = a.sampleAt(i, 0)
		if !a.clocks[i].at.IsFinite() {
			return nil, a.disorder(i, 0)
		}
	}
	return a, nil
}

// points bounds the rows in a period of the first task.
func (a *agenda) points(e *engine, perTick int64) int64 {
	n := perTick
	for i := range e.tasks {
		ratio := a.periods[0].Float64() / a.periods[i].Float64()
		n += int64(math.Ceil(ratio+1) * float64(2+len(e.layout.held)))
	}
	return n
}

// sampleAt is the instant of sample k of task i.
func (a *agenda) sampleAt(i int, k int64) dd.Float {
	t := a.periods[i].Mul(dd.New(float64(k))).Add(a.clocks[i].offset)
	if j := a.e.tasks[i].Jitter; j != nil {
		t = t.Add(dd.New(j(k)))
	}
	if t.Sign() < 0 {
		return dd.Zero
	}
	return t
}

// updateAt is the instant of the update of sample k, taken at sample.
func (a *agenda) updateAt(i int, k int64, sample dd.Float) dd.Float {
	if a.e.tasks[i].UpdateOnGrid {
		sample = a.periods[i].Mul(dd.New(float64(k))).Add(a.clocks[i].offset)
	}
	at := sample.Add(a.clocks[i].delay)
	if shift := a.e.tasks[i].UpdateShift; shift != nil {
		at = at.Add(dd.New(shift(k)))
	}
	return at
}

// same tells whether b is the instant a.
func same(a, b dd.Float) bool {
	return math.Abs(a.Sub(b).Float64()) <= 1e-20*math.Max(math.Abs(a.Hi), math.Abs(b.Hi))
}

// arrival is when the effort of sample k of its task reaches held column h; ok is false when it is
// not on its way.
func (a *agenda) arrival(h *held) (at dd.Float, ok bool) {
	c := &a.clocks[h.task]
	k := h.next - c.first
	if k < 0 || k >= int64(len(c.due)) {
		return dd.Zero, false
	}
	return c.due[k].Add(a.delays[h.channel]), true
}

// update is when the next effort of task i is applied.
func (a *agenda) update(i int) (at dd.Float, ok bool) {
	c := &a.clocks[i]
	k := a.e.tasks[i].applied - c.first
	if k < 0 || k >= int64(len(c.due)) {
		return dd.Zero, false
	}
	return c.due[k], true
}

// earliest is the first instant that is due.
func (a *agenda) earliest() dd.Float {
	at := a.periods[0].Mul(dd.New(float64(a.tick)))
	first := func(t dd.Float) {
		if t.Cmp(at) < 0 {
			at = t
		}
	}
	for i := range a.clocks {
		first(a.clocks[i].at)
		if t, ok := a.update(i); ok {
			first(t)
		}
	}
	for k := range a.e.layout.held {
		if t, ok := a.arrival(&a.e.layout.held[k]); ok {
			first(t)
		}
	}
	return at
}

// next is called after the instant before has been acted on.
func (a *agenda) next() (*instant, error) {
	a.drop()
	now := a.earliest()
	in := &a.out
	*in = instant{t: now.Float64(), samples: in.samples[:0], updates: in.updates[:0], arrive: in.arrive[:0]}
	if same(a.periods[0].Mul(dd.New(float64(a.tick))), now) {
		a.tick++
		in.tick = true
	}
	if err := a.sampling(in, now); err != nil {
		return nil, err
	}
	for i := range a.clocks {
		if t, ok := a.update(i); ok && same(t, now) {
			in.updates = append(in.updates, i)
		}
	}
	for k := range a.e.layout.held {
		if t, ok := a.arrival(&a.e.layout.held[k]); ok && same(t, now) {
			in.arrive = append(in.arrive, k)
		}
	}
	if now.Cmp(a.end) >= 0 || same(now, a.end) {
		return in, nil
	}
	in.length = a.after(in, now).Sub(now).Float64()
	a.e.divide(in)
	return in, nil
}

// sampling lists the tasks that sample now and puts their updates on the way.
func (a *agenda) sampling(in *instant, now dd.Float) error {
	for i := range a.clocks {
		c := &a.clocks[i]
		if !same(c.at, now) {
			continue
		}
		in.samples = append(in.samples, i)
		due := a.updateAt(i, c.next, c.at)
		if a.e.tasks[i].UpdateShift != nil {
			due = a.inOrder(i, due)
		}
		if !due.IsFinite() || due.Cmp(c.at) < 0 || len(c.due) > 0 && due.Cmp(c.due[len(c.due)-1]) <= 0 {
			return a.disorder(i, c.next)
		}
		c.due = append(c.due, due)
		c.next++
		before := c.at
		c.at = a.sampleAt(i, c.next)
		if !(c.at.Cmp(before) > 0) || !c.at.IsFinite() {
			return a.disorder(i, c.next)
		}
	}
	return nil
}

// inOrder moves a shifted update behind its sample and behind the update ahead of it.
func (a *agenda) inOrder(i int, due dd.Float) dd.Float {
	const apart = 1e-6 // of a period
	c := &a.clocks[i]
	if due.Cmp(c.at) < 0 {
		due = c.at
	}
	if n := len(c.due); n > 0 {
		if least := c.due[n-1].Add(dd.New(apart * a.periods[i].Float64())); due.Cmp(least) < 0 {
			due = least
		}
	}
	return due
}

func (a *agenda) disorder(i int, k int64) error {
	return fmt.Errorf("%s: the jitter of tick %d puts its instants out of order", a.e.tasks[i].name(i), k)
}

// after is the instant that follows now, the actions of now being as good as done.
func (a *agenda) after(in *instant, now dd.Float) dd.Float {
	for _, i := range in.updates {
		a.e.tasks[i].applied++
	}
	for _, k := range in.arrive {
		a.e.layout.held[k].next++
	}
	at := a.earliest()
	for _, i := range in.updates {
		a.e.tasks[i].applied--
	}
	for _, k := range in.arrive {
		a.e.layout.held[k].next--
	}
	return at
}

// drop forgets the updates that nothing waits for any more.
func (a *agenda) drop() {
	for i := range a.clocks {
		c := &a.clocks[i]
		oldest := a.e.tasks[i].applied
		for k := range a.e.layout.held {
			if h := &a.e.layout.held[k]; h.task == i {
				oldest = min(oldest, h.next)
			}
		}
		if n := oldest - c.first; n > 64 && 2*n > int64(len(c.due)) {
			c.due = append(c.due[:0], c.due[n:]...)
			c.first = oldest
		}
	}
}
