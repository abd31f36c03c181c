package sim

import (
	"math"
	"math/big"
	"sort"

	"steadytick/internal/dd"
)

// instant is a moment at which something happens, and the interval that follows it.
type instant struct {
	t       float64
	tick    bool  // a period of the first task begins
	samples []int // tasks
	updates []int // tasks
	arrive  []int // indices into layout.held
	length  float64
	parts   int
	step    *advance // of length/parts; nil: not prepared
	part    *big.Rat // length/parts where steps are prepared
	laws    map[*law]*advance
	weights []float64 // of the integral over the interval, parts + 1 of them
}

// timeline gives the instants of a run one after the other; the last has length 0.
type timeline interface{ next() (*instant, error) }

// maxSlots is the longest cycle of instants that is prepared; beyond it they are sought
// one by one.
const maxSlots = 256

// never is a number of ticks that no run reaches.
const never = 1 << 60

// cycle is the time-line of tasks without jitter: the instants within the smallest
// common period, prepared once.
type cycle struct {
	period dd.Float
	phase  []dd.Float
	list   []instant
	at     int
	turn   float64
	endAt  int // the run ends at this instant of turn endTurn
	end    float64
	out    instant
}

// ratLCM is the smallest positive number that is a whole multiple of both.
func ratLCM(a, b *big.Rat) *big.Rat {
	n := new(big.Int).Mul(a.Num(), b.Denom())
	m := new(big.Int).Mul(b.Num(), a.Denom())
	g := new(big.Int).GCD(nil, nil, n, m)
	lcm := n.Mul(n, m.Quo(m, g))
	return new(big.Rat).SetFrac(lcm, new(big.Int).Mul(a.Denom(), b.Denom()))
}

// newCycle returns nil when the tasks have no short common period.
func newCycle(e *engine) (*cycle, error) {
	tasks := e.cfg.Tasks
	whole := tasks[0].Period
	for i := range tasks {
		if tasks[i].Jitter != nil || tasks[i].UpdateShift != nil {
			return nil, nil
		}
		whole = ratLCM(whole, tasks[i].Period)
	}
	slots := 0.0
	for i := range tasks {
		n, _ := new(big.Rat).Quo(whole, tasks[i].Period).Float64()
		slots += n
	}
	if !(slots <= maxSlots) {
		return nil, nil
	}
	c := &cycle{period: dd.FromRat(whole)}
	phases := c.place(e, whole)
	for i := range c.list {
		after := whole
		if i+1 < len(phases) {
			after = phases[i+1]
		}
		gap := new(big.Rat).Sub(after, phases[i])
		if err := e.interval(&c.list[i], gap); err != nil {
			return nil, err
		}
		c.phase = append(c.phase, dd.FromRat(phases[i]))
	}
	end := new(big.Rat).Mul(tasks[0].Period, new(big.Rat).SetInt64(e.cfg.Ticks))
	turns, rest := floorMod(end, whole)
	c.end, _ = new(big.Float).SetInt(turns).Float64()
	c.endAt = sort.Search(len(phases), func(i int) bool { return phases[i].Cmp(rest) >= 0 })
	return c, nil
}

// place lists the instants of one cycle by their phase.
func (c *cycle) place(e *engine, whole *big.Rat) []*big.Rat {
	type mark struct {
		phase *big.Rat
		kind  int
		index int
	}
	var marks []mark
	repeat := func(first, period *big.Rat, kind, index int) (skipped int64) {
		skip, phase := floorMod(first, period)
		for phase.Cmp(whole) < 0 {
			marks = append(marks, mark{phase, kind, index})
			phase = new(big.Rat).Add(phase, period)
		}
		if !skip.IsInt64() || skip.Int64() > never {
			return never
		}
		return skip.Int64()
	}
	repeat(new(big.Rat), e.cfg.Tasks[0].Period, 0, 0) // a point at every tick of the first task
	for i := range e.cfg.Tasks {
		t := &e.cfg.Tasks[i]
		e.tasks[i].skip = repeat(orZero(t.Offset), t.Period, 1, i)
		update := new(big.Rat).Add(orZero(t.Offset), orZero(t.Delay))
		e.tasks[i].applied = -repeat(update, t.Period, 2, i)
		for k := range e.layout.held {
			h := &e.layout.held[k]
			if h.task == i {
				at := new(big.Rat).Add(update, e.cfg.System.channels[h.channel].Delay)
				h.next = -repeat(at, t.Period, 3, k)
			}
		}
	}
	sort.SliceStable(marks, func(i, j int) bool { return marks[i].phase.Cmp(marks[j].phase) < 0 })
	var phases []*big.Rat
	for _, m := range marks {
		if n := len(phases); n == 0 || phases[n-1].Cmp(m.phase) != 0 {
			phases = append(phases, m.phase)
			c.list = append(c.list, instant{})
		}
		in := &c.list[len(c.list)-1]
		switch m.kind {
		case 0:
			in.tick = true
		case 1:
			in.samples = append(in.samples, m.index)
		case 2:
			in.updates = append(in.updates, m.index)
		case 3:
			in.arrive = append(in.arrive, m.index)
		}
	}
	return phases
}

// floorMod returns a = n·b + rest with 0 <= rest < b; a >= 0.
func floorMod(a, b *big.Rat) (n *big.Int, rest *big.Rat) {
	q := new(big.Rat).Quo(a, b)
	n = new(big.Int).Quo(q.Num(), q.Denom())
	rest = new(big.Rat).Mul(b, new(big.Rat).SetInt(n))
	return n, rest.Sub(a, rest)
}

// now is the instant that comes next: turn·period to the last bit, with the phase added to its rest.
func (c *cycle) now() float64 { return c.instant(c.turn, c.at) }

// instant is number at of a turn.
func (c *cycle) instant(turn float64, at int) float64 {
	p := turn * c.period.Hi
	low := math.FMA(turn, c.period.Hi, -p) + turn*c.period.Lo
	return p + (low + c.phase[at].Hi)
}

func (c *cycle) next() (*instant, error) {
	in := &c.list[c.at]
	in.t = c.now()
	if c.turn == c.end && c.at == c.endAt {
		c.out = *in
		c.out.length, c.out.parts = 0, 0
		return &c.out, nil
	}
	if c.at++; c.at == len(c.list) {
		c.at = 0
		c.turn++
	}
	return in, nil
}
