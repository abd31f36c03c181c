package sim

import (
	"errors"
	"math"
	"math/big"

	"steadytick/sdomain"
)

// ErrIllPosed is a continuous loop whose direct gain leaves no unique effort: 1 + D·P(∞)·H(∞) is
// zero or, with limits, not positive.
var ErrIllPosed = errors.New("the continuous loop has an algebraic loop without a unique solution")

// mode is what the actuator and the integrators of the continuous loop do.
type mode int

const (
	linear mode = iota // u = v
	high               // u = upper limit
	low                // u = lower limit
)

// twinModel is the continuous loop as an ordinary linear system in each mode,
//
//	x' = A·x + G·g(t) + Q·q(t),   q_j(t) = m̂(t − lag_j)
//
// All dead time stands in one place: with ŷ = P₀·(u+d) and m̂ = H₀·ŷ, P₀ and H₀ without dead time, the
// output is ŷ behind by the dead time of the plant, and what term t of the controller sees is m̂
// behind by those of plant, sensor and term. g holds the reference behind by each delay in
// use, the disturbance, and the constant 1. Scalars are rows over (x, g, q, u).
type twinModel struct {
	n, ng, nq int
	lags      []*big.Rat // positive, distinct
	rDelays   []*big.Rat // distinct
	width     int        // n + ng + nq + 1

	state                 [][]float64 // x' by rows
	y, m, v, slope        []float64
	integrators           []int // states that hold under anti-windup, the outputs first
	outputs               int   // how many of them go straight into v
	limits                Limits
	antiWindup            AntiWindup
	smoothing             float64 // derivatives gained on the way round the loop
	plantDelay, allDelays *big.Rat
}

// regime is the system in one mode: rows over (x, g, q).
type regime struct {
	key               int
	a                 []float64 // n×n
	f                 []float64 // n×(ng+nq)
	y, m, u, v, slope []float64
	frozen            bool
}

// index finds d in list, adding it.
func index(list *[]*big.Rat, d *big.Rat) int {
	for i, v := range *list {
		if v.Cmp(d) == 0 {
			return i
		}
	}
	*list = append(*list, d)
	return len(*list) - 1
}

func sumRat(list ...*big.Rat) *big.Rat {
	s := new(big.Rat)
	for _, v := range list {
		s.Add(s, v)
	}
	return s
}

// builder gathers the parts before their places are known.
type builder struct {
	cfg       *TwinConfig
	plant     *chain // states of the plant, then of the sensor
	alone     *chain // the plant by itself: its states are the first ones
	terms     []*chain
	rho       [][]float64
	lag       []int // of each term: index into lags, −1 for none
	ref       []int // of each term: index into rDelays
	prefilter *chain
	feed      *chain
	feedRef   int
	model     *twinModel
}

func newTwinModel(cfg *TwinConfig) (*twinModel, error) {
	rule := cfg.AntiWindup
	if rule == Stop || rule == Clamp {
		rule = StopOutward
	}
	b := &builder{cfg: cfg, model: &twinModel{limits: cfg.Limits, antiWindup: rule}}
	var err error
	if b.alone, err = realizeModel(cfg.Plant); err != nil {
		return nil, err
	}
	sensor, err := realizeModel(cfg.Sensor)
	if err != nil {
		return nil, err
	}
	b.plant = b.alone.after(sensor)
	m := b.model
	m.plantDelay = deadTime(cfg.Plant)
	m.allDelays = sumRat(m.plantDelay, deadTime(cfg.Sensor))
	if err := b.controller(); err != nil {
		return nil, err
	}
	b.size()
	if m.n > maxOrder {
		return nil, ErrRange
	}
	b.rows()
	if k := m.v[m.width-1]; k == 1 || m.limits.On && !(k < 1) {
		return nil, ErrIllPosed
	}
	return m, nil
}

// controller realizes the controller and lists the delays in use.
func (b *builder) controller() error {
	var err error
	var before *big.Rat = new(big.Rat)
	if b.cfg.Prefilter != nil {
		if b.prefilter, err = realizeModel(*b.cfg.Prefilter); err != nil {
			return err
		}
		before = deadTime(*b.cfg.Prefilter)
	}
	m := b.model
	controllerDegree := math.Inf(1)
	for i := range b.cfg.Terms {
		t := b.cfg.Terms[i].Model
		tf, err := t.TF()
		if err != nil {
			return err
		}
		var rho []float64
		if m.antiWindup != NoAntiWindup {
			rho, tf = splitIntegrators(tf)
		}
		var c *chain
		if len(rho) == 0 {
			c, err = realizeExact(tf, t.Ratio)
		} else {
			c, err = realize(tf, nil)
		}
		if err != nil {
			return err
		}
		b.terms, b.rho = append(b.terms, c), append(b.rho, rho)
		b.ref = append(b.ref, index(&m.rDelays, sumRat(deadTime(t), before)))
		lag := sumRat(m.allDelays, deadTime(t))
		if lag.Sign() > 0 {
			b.lag = append(b.lag, index(&m.lags, lag))
		} else {
			b.lag = append(b.lag, -1)
		}
		if !t.Ratio.IsZero() {
			controllerDegree = math.Min(controllerDegree, float64(t.RelativeDegree()))
		}
	}
	b.feedRef = -1
	if f := b.cfg.Feedforward; f != nil {
		if b.feed, err = realizeModel(*f); err != nil {
			return err
		}
		b.feedRef = index(&m.rDelays, deadTime(*f))
	}
	m.smoothing = controllerDegree + relativeDegree(b.cfg.Plant) + relativeDegree(b.cfg.Sensor)
	if m.smoothing == 0 {
		m.smoothing = b.damping()
	}
	return nil
}

func relativeDegree(m sdomain.Model) float64 {
	if m.Ratio.IsZero() {
		return math.Inf(1)
	}
	return float64(m.RelativeDegree())
}

// damping stands in for the smoothing of a loop that passes jumps straight round: they shrink by the
// direct gain each time, and are followed down to 1e-17 of their size.
func (b *builder) damping() float64 {
	gain := 0.0
	for _, c := range b.terms {
		gain += c.d
	}
	gain = math.Abs(gain * b.plant.d)
	return math.Max(0, keptOrder*math.Log(gain)/math.Log(1e-17))
}

// size counts the states.
func (b *builder) size() {
	m := b.model
	m.n = b.plant.n
	for i, c := range b.terms {
		m.n += c.n + len(b.rho[i])
	}
	if b.prefilter != nil {
		m.n += b.prefilter.n * len(b.filtered())
	}
	if b.feed != nil {
		m.n += b.feed.n
	}
	m.ng, m.nq = len(m.rDelays)+2, len(m.lags)
	m.width = m.n + m.ng + m.nq + 1
}

// filtered lists the reference delays that need a prefilter of their own.
func (b *builder) filtered() []int {
	var list []int
	seen := map[int]bool{}
	for _, k := range b.ref {
		if !seen[k] {
			seen[k] = true
			list = append(list, k)
		}
	}
	return list
}

// row is a scalar over (x, g, q, u).
func (m *twinModel) row() []float64 { return make([]float64, m.width) }

func (m *twinModel) unit(i int) []float64 {
	r := m.row()
	r[i] = 1
	return r
}

// addTo does r += k·s.
func addTo(r []float64, k float64, s []float64) {
	for i, v := range s {
		r[i] += k * v
	}
}

// place puts the states of c at position at, driven by in; the result is its output.
func (m *twinModel) place(c *chain, at int, in []float64) []float64 {
	out := m.row()
	for i := range c.n {
		r := m.row()
		copy(r[at:], c.a[i*c.n:(i+1)*c.n])
		addTo(r, c.b[i], in)
		m.state[at+i] = r
		out[at+i] = c.c[i]
	}
	addTo(out, c.d, in)
	return out
}

// rows writes the whole loop.
func (b *builder) rows() {
	m := b.model
	m.state = make([][]float64, m.n)
	g := m.n // where g starts
	in := m.unit(m.width - 1)
	in[g+len(m.rDelays)] = 1 // u + d
	m.m = m.place(b.plant, 0, in)
	m.y = m.row()
	copy(m.y, b.alone.c)
	addTo(m.y, b.alone.d, in)
	at := b.plant.n
	reference := map[int][]float64{}
	for _, k := range b.filtered() {
		reference[k] = m.unit(g + k)
		if b.prefilter != nil {
			reference[k] = m.place(b.prefilter, at, reference[k])
			at += b.prefilter.n
		}
	}
	m.v, m.slope = m.row(), m.row()
	var inner []int
	for i, c := range b.terms {
		e := m.row()
		addTo(e, b.cfg.Terms[i].Weight, reference[b.ref[i]])
		if b.lag[i] < 0 {
			addTo(e, -1, m.m)
		} else {
			e[g+m.ng+b.lag[i]]--
		}
		addTo(m.v, 1, m.place(c, at, e))
		at += c.n
		for j, rho := range b.rho[i] {
			r := m.row()
			addTo(r, rho, e)
			if j+1 < len(b.rho[i]) {
				r[at+j+1] = 1
			}
			m.state[at+j] = r
			if j == 0 {
				m.integrators = append(m.integrators, at)
				m.v[at]++
				addTo(m.slope, 1, r)
			} else {
				inner = append(inner, at+j)
			}
		}
		at += len(b.rho[i])
	}
	m.outputs = len(m.integrators)
	m.integrators = append(m.integrators, inner...)
	if b.feed != nil {
		addTo(m.v, 1, m.place(b.feed, at, m.unit(g+b.feedRef)))
	}
	if m.antiWindup == Tracking {
		// (u − v)/(TrackingTime·number of integrating terms) into each.
		k := 1 / (b.cfg.TrackingTime * float64(max(m.outputs, 1)))
		for _, i := range m.integrators[:m.outputs] {
			addTo(m.state[i], -k, m.v)
			m.state[i][m.width-1] += k
		}
	}
}

// regime is the system in a mode; frozen stops the integrators that anti-windup stops.
func (m *twinModel) regime(md mode, frozen bool) *regime {
	r := &regime{frozen: frozen, key: 2 * int(md)}
	if frozen {
		r.key++
	}
	last := m.width - 1
	u := m.row()
	switch md {
	case linear:
		addTo(u, 1/(1-m.v[last]), m.v)
	case high:
		u[m.n+m.ng-1] = m.limits.High
	case low:
		u[m.n+m.ng-1] = m.limits.Low
	}
	u[last] = 0
	with := func(row []float64) []float64 {
		out := append([]float64(nil), row...)
		out[last] = 0
		addTo(out, row[last], u)
		return out[:last]
	}
	r.u, r.y, r.m, r.v, r.slope = u[:last], with(m.y), with(m.m), with(m.v), with(m.slope)
	for i := range m.state {
		row := with(m.state[i])
		if frozen && m.stopped(i) {
			clear(row)
		}
		r.a = append(r.a, row[:m.n]...)
		r.f = append(r.f, row[m.n:]...)
	}
	return r
}

// stopped tells whether state i holds while the integrators are frozen.
func (m *twinModel) stopped(i int) bool {
	for k, s := range m.integrators {
		if s == i {
			return m.antiWindup == StopOutward || k >= m.outputs
		}
	}
	return false
}
