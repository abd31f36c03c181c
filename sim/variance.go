package sim

import (
	"context"
	"errors"
	"math"
	"math/big"
	"sort"
)

// NoiseGains are standard deviations at the samples of a linear sampled loop, for white noise of standard
// deviation 1 on what the controller reads, a new value at every sample.
type NoiseGains struct {
	Effort, Output float64
}

// ErrNoVariance is a loop that does not forget: unstable, or with modes that do not die out.
var ErrNoVariance = errors.New("the loop has no stationary variance")

// mostLate is the number of efforts on their way beyond which the variance is summed along the impulse
// response in place of a Lyapunov solution, and the ticks that may take.
const (
	mostLate  = 40
	mostTicks = 4_000_000
)

// Noise solves for the stationary variance of the one task of a loop without limits, jitter and
// quantization,
//
//	P = F·P·Fᵀ + b·bᵀ,   F the map of a tick, b what the noise of a sample does
//
// by doubling (Smith, 1968; from memory): with D = F − I, P ← P + F·P·Fᵀ and D ← 2D + D², so that slow modes
// under fast ticks keep their digits. difference: the noise comes as the difference of white noise over the period, as in
// the velocity from an encoder's counts. Loops with long delays are followed along their impulse response instead.
// Errors: ErrNoVariance, ctx.Err(), mistakes in cfg.
func Noise(ctx context.Context, cfg Config, difference bool) (NoiseGains, error) {
	cfg.Reference = Zero()
	if cfg.Ticks == 0 {
		cfg.Ticks = 1
	}
	if err := cfg.check(); err != nil {
		return NoiseGains{}, err
	}
	if len(cfg.Tasks) != 1 {
		return NoiseGains{}, errors.New("the variance is that of one task")
	}
	f, err := newTickMap(cfg.System, &cfg.Tasks[0], difference)
	if err != nil {
		return NoiseGains{}, err
	}
	if f == nil {
		return impulseNoise(ctx, cfg, difference)
	}
	return f.gains()
}

// tickMap is the closed loop from one sample to the next, s ← s + D·s + b·n, with the effort computed at the
// sample u = K·s + k·n and the output y = Y·s; s holds the plant's states, the efforts on their way (the latest
// first) and the controller's states.
type tickMap struct {
	n          int
	d, b       []float64
	effort     []float64
	direct     float64
	output     []float64
	period     float64
	difference bool
}

// newTickMap returns nil when too many efforts are on their way, or the controller has delays of its own.
func newTickMap(s *Continuous, t *Task, difference bool) (*tickMap, error) {
	plant, err := newTickPlant(s, t)
	if err != nil || plant == nil {
		return nil, err
	}
	states := 0
	for i := range t.Controller.terms {
		b := &t.Controller.terms[i]
		if b.ticks > 0 {
			return nil, nil
		}
		states += b.chain.n + len(b.rho)
	}
	x, late := s.n, plant.late
	n := x + late + states
	f := &tickMap{n: n, d: make([]float64, n*n), b: make([]float64, n), effort: make([]float64, n), output: make([]float64, n)}
	period := t.Controller.period
	m := append(append([]float64(nil), plant.reads...), make([]float64, n-x-late)...) // m without noise, over s
	at := x + late
	for i := range t.Controller.terms {
		b := &t.Controller.terms[i]
		f.term(b, at, m, period)
		at += b.chain.n + len(b.rho)
	}
	for i := range x {
		row := plant.step[i*(x+late+1) : (i+1)*(x+late+1)]
		for j := range x {
			f.d[i*n+j] += row[j]
		}
		for j := range late {
			f.d[i*n+x+j] += row[x+1+j]
		}
		f.add(i, row[x], 0)
	}
	if late > 0 {
		f.add(x, 1, -1)
		for j := 1; j < late; j++ {
			f.d[(x+j)*n+x+j-1]++
			f.d[(x+j)*n+x+j]--
		}
	}
	copy(f.output, plant.shows)
	f.period, f.difference = period, difference
	return f, nil
}

// add lets row i take up factor times the new effort, and own times itself.
func (f *tickMap) add(i int, factor, own float64) {
	for j, k := range f.effort {
		f.d[i*f.n+j] += factor * k
	}
	f.b[i] += factor * f.direct
	f.d[i*f.n+i] += own
}

// term adds a block of the controller with its states from at on; its input is −m − n.
func (f *tickMap) term(b *block, at int, m []float64, period float64) {
	n, c := f.n, b.chain
	into := func(row []float64, gain float64, noise *float64) {
		for j, v := range m {
			row[j] -= gain * v
		}
		*noise -= gain
	}
	for i := range c.n {
		row := f.d[(at+i)*n : (at+i+1)*n]
		for j := range c.n {
			row[at+j] += period * c.a[i*c.n+j]
		}
		into(row, period*c.b[i], &f.b[at+i])
		f.effort[at+i] += c.c[i]
	}
	for j, rho := range b.rho {
		k := at + c.n + j
		row := f.d[k*n : (k+1)*n]
		if j+1 < len(b.rho) {
			row[k+1] += period
		}
		into(row, period*rho, &f.b[k])
		if j == 0 {
			f.effort[k]++
		}
	}
	into(f.effort, c.d, &f.direct)
}

// gains solves for the variance by doubling.
func (f *tickMap) gains() (NoiseGains, error) {
	n := f.n
	p, next, work := make([]float64, n*n), make([]float64, n*n), make([]float64, n*n)
	for i := range n {
		for j := range n {
			p[i*n+j] = f.b[i] * f.b[j]
		}
	}
	d := append([]float64(nil), f.d...)
	for range 80 {
		// P + (I+D)·P·(I+D)ᵀ = 2P + W + Wᵀ + W·Dᵀ, W = D·P: but summed as (I+D)·P first, so that
		// nothing cancels where D is near −I.
		product(work, d, p, n)
		for i := range work {
			work[i] += p[i]
		}
		change, size := 0.0, 0.0
		for i := range n {
			for j := range n {
				sum := work[i*n+j]
				for k := range n {
					sum += work[i*n+k] * d[j*n+k]
				}
				next[i*n+j] = p[i*n+j] + sum
			}
			change = math.Max(change, (next[i*n+i]-p[i*n+i])/math.Max(next[i*n+i], 1e-300))
			size = math.Max(size, next[i*n+i])
		}
		p, next = next, p
		if !(size < 1e200) {
			return NoiseGains{}, ErrNoVariance
		}
		if change <= 1e-16 {
			return NoiseGains{Effort: f.deviation(f.effort, f.direct, p), Output: f.deviation(f.output, 0, p)}, nil
		}
		product(work, d, d, n)
		for i := range d {
			d[i] = 2*d[i] + work[i]
		}
	}
	return NoiseGains{}, ErrNoVariance
}

// deviation is that of r·s + direct·n with the variance P of s before the noise n. Of differenced noise it is that of the
// difference of two such outputs over the period,
//
//	r·D·s + (r·b − direct)·n + direct·(n of the next sample)
func (f *tickMap) deviation(r []float64, direct float64, p []float64) float64 {
	n := f.n
	sum := direct * direct
	if f.difference {
		moved, jump := make([]float64, n), -direct
		for i, v := range r {
			jump += v * f.b[i]
			for j, d := range f.d[i*n : (i+1)*n] {
				moved[j] += v * d
			}
		}
		r = moved
		sum += jump * jump
	}
	for i, a := range r {
		if a == 0 {
			continue
		}
		for j, b := range r {
			sum += a * b * p[i*n+j]
		}
	}
	v := math.Sqrt(math.Max(0, sum))
	if f.difference {
		v /= f.period
	}
	return v
}

// product is out = a·b, n×n.
func product(out, a, b []float64, n int) {
	clear(out)
	for i := range n {
		row := out[i*n : (i+1)*n]
		for k := range n {
			v := a[i*n+k]
			if v == 0 {
				continue
			}
			for j, w := range b[k*n : (k+1)*n] {
				row[j] += v * w
			}
		}
	}
}

// tickPlant is the plant from one sample to the next: the change of the states over (x, the new effort, those on their
// way), and the outputs at the sample over (x, those on their way).
type tickPlant struct {
	late  int
	step  []float64 // n × (n + 1 + late)
	reads []float64
	shows []float64
}

// arrivals of the channels of a task, in order of their phase within the tick.
type arrival struct {
	column int
	late   int // whole ticks
	phase  *big.Rat
}

// newTickPlant returns nil when more than mostLate efforts are on their way.
func newTickPlant(s *Continuous, t *Task) (*tickPlant, error) {
	l := newLayout(&Config{System: s, Tasks: []Task{*t}})
	var list []arrival
	late := 0
	for _, h := range l.held {
		at := new(big.Rat).Add(orZero(t.Delay), s.channels[h.channel].Delay)
		whole, phase := floorMod(at, t.Period)
		if !whole.IsInt64() || whole.Int64() >= mostLate {
			return nil, nil
		}
		a := arrival{h.column, int(whole.Int64()), phase}
		list = append(list, a)
		late = max(late, a.late+1)
	}
	sort.SliceStable(list, func(i, j int) bool { return list[i].phase.Cmp(list[j].phase) < 0 })
	base := l.matrices(s)
	f, key := newFlow(base.n, base.m, base.a, base.b, base.s), l.key()
	n, width := s.n, s.n+1+late
	p := &tickPlant{late: late, step: make([]float64, n*width), reads: make([]float64, n+late), shows: make([]float64, n+late)}
	from := map[int]int{} // column → age of the effort it holds: 0 the new one
	for _, a := range list {
		from[a.column] = a.late + 1
	}
	p.outputs(s, l, t, from)
	now := new(big.Rat)
	for i := 0; i <= len(list); i++ {
		end := t.Period
		if i < len(list) {
			end = list[i].phase
		}
		if gap := new(big.Rat).Sub(end, now); gap.Sign() > 0 {
			e, err := s.step(f, key, gap)
			if err != nil {
				return nil, err
			}
			p.advance(e, n, width, from)
			now = end
		}
		if i < len(list) {
			from[list[i].column]--
		}
	}
	return p, nil
}

// outputs are y and m at the sample.
func (p *tickPlant) outputs(s *Continuous, l *layout, t *Task, from map[int]int) {
	row := func(out []float64, k int) {
		copy(out, s.c[k*s.n:(k+1)*s.n])
		d := l.through(s, k)
		for column, age := range from {
			out[s.n+age-1] += d[column]
		}
	}
	row(p.shows, OutputY)
	row(p.reads, t.Reads[0])
}

// advance adds a piece of the tick: step ← step + E·(x + step, columns).
func (p *tickPlant) advance(e *advance, n, width int, from map[int]int) {
	states := append([]float64(nil), p.step...)
	columns := n
	for column := range from {
		columns = max(columns, n+column+1)
	}
	for i := range n {
		row := p.step[i*width : (i+1)*width]
		for j := range n {
			v := e.at(i, j, columns)
			row[j] += v
			for k, w := range states[j*width : (j+1)*width] {
				row[k] += v * w
			}
		}
		for column, age := range from {
			row[n+age] += e.at(i, n+column, columns)
		}
	}
}

// at is entry (i, j) of E, which has the given number of columns.
func (p *advance) at(i, j, columns int) float64 { return p.e[i/4*columns+j][i%4] }
