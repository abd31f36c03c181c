package study

import (
	"fmt"
	"math"
	"math/big"
	"slices"

	"steadytick/discretize"
	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/loop"
)

// held is what is behind the hold, its roots found once for every period and delay.
type held struct {
	plant      *discretize.Plant
	withSensor *discretize.Plant // nil for a static sensor
	sensor     dd.Float          // its gain, where static
	deadTime   *big.Rat          // of the plant, seconds
	fastest    float64           // largest frequency among the plant's modes, rad/s
	shortest   float64           // shortest time constant among them, seconds; 0 without one
}

func prepare(l *loop.Loop) (held, error) {
	h := held{deadTime: l.Plant.Delay}
	var err error
	if h.plant, err = discretize.Prepare(l.Plant); err != nil {
		return h, fmt.Errorf("plant: %w", err)
	}
	h.fastest, h.shortest = fastestModes(l)
	if g, ok := staticSensor(l.Sensor); ok {
		h.sensor = dd.FromRat(g)
		return h, nil
	}
	pm, err := l.Plant.Mul(l.Sensor.Model)
	if err != nil {
		return h, err
	}
	if h.withSensor, err = discretize.Prepare(pm); err != nil {
		return h, fmt.Errorf("plant with sensor: %w", err)
	}
	return h, nil
}

// fastestModes gives the largest frequency |Im p| of the plant's poles, rad/s, and the
// shortest time 1/|p|, seconds, 0 for a plant without poles off the origin.
func fastestModes(l *loop.Loop) (frequency, shortest float64) {
	poles, err := l.Plant.Ratio.Poles()
	if err != nil {
		return 0, 0
	}
	speed := 0.0
	for _, p := range poles {
		frequency = math.Max(frequency, math.Abs(p.Im.Float64()))
		speed = math.Max(speed, p.Abs())
	}
	if speed > 0 {
		shortest = 1 / speed
	}
	return frequency, shortest
}

// heldAt is what is behind the hold at one period and one time from sample to update. Controllers of
// any map share it; it is not for concurrent use.
type heldAt struct {
	held
	period, delay *big.Rat
	gy, gm        lti.TF // zeros known

	ticked *discretize.PlantAt
	cut    []*part // see smoothParts
}

// at holds the plant at a period with the given time from sample to update, exact seconds.
func (h held) at(period, delay *big.Rat) (*heldAt, error) {
	a := &heldAt{held: h, period: period, delay: delay}
	var err error
	if a.ticked, err = h.plant.At(period); err != nil {
		return nil, fmt.Errorf("plant: %w", err)
	}
	gy, err := a.ticked.Hold(delay)
	if err != nil {
		return nil, fmt.Errorf("plant: %w", err)
	}
	a.gy = gy.TF.FindZeros()
	if h.withSensor == nil {
		a.gm = a.gy.Scale(h.sensor) // the same numbers as the plant's
		return a, nil
	}
	gm, err := h.withSensor.Hold(period, delay)
	if err != nil {
		return nil, fmt.Errorf("plant with sensor: %w", err)
	}
	a.gm = gm.TF.FindZeros()
	return a, nil
}

// instant is the plant seen at one offset within the tick.
type instant struct {
	g      lti.TF
	err    error
	terms  int // of series
	series lti.Laurent
}

// seenAt returns the hold equivalent of the plant seen at an offset after the tick.
func (a *heldAt) seenAt(o *offset) *instant {
	if o.seen != nil {
		return o.seen
	}
	o.seen = &instant{}
	switch o.x {
	case 0, 1:
		theta := o.in.from
		if o.x == 1 {
			theta = o.in.to
		}
		m, err := a.ticked.Hold(new(big.Rat).Sub(a.delay, theta))
		o.seen.g, o.seen.err = m.TF, err
	default:
		list, err := a.along(o.in, []float64{o.x})
		if o.seen.err = err; err == nil {
			o.seen.g = list[0]
		}
	}
	return o.seen
}

func (a *heldAt) along(p *part, x []float64) ([]lti.TF, error) {
	return a.ticked.Along(new(big.Rat).Sub(a.delay, p.from), new(big.Rat).Sub(a.delay, p.to), x)
}

// look fills in the inner instants of a part in one go.
func (a *heldAt) look(p *part) {
	inner := p.nodes[1 : len(p.nodes)-1]
	x := make([]float64, len(inner))
	for i, o := range inner {
		x[i] = o.x
	}
	list, err := a.along(p, x)
	for i, o := range inner {
		o.seen = &instant{err: err}
		if err == nil {
			o.seen.g = list[i]
		}
	}
}

// laurent returns n terms of the series at rest.
func (s *instant) laurent(n int) lti.Laurent {
	if s.terms != n {
		s.series, s.terms = s.g.Series(n), n
	}
	return s.series
}

// part is an interval of offsets in which the error is smooth, with its Chebyshev instants.
type part struct {
	from, to    *big.Rat // seconds after the tick
	start, span dd.Float // from, to − from
	nodes       []*offset
}

// offset is an instant of a part: from + x·(to − from).
type offset struct {
	in   *part
	x    float64
	seen *instant
}

// seconds is the offset itself, to 1e-32 of the tick.
func (o *offset) seconds() dd.Float { return o.in.start.Add(o.in.span.MulFloat(o.x)) }

func (p *part) at(x float64) *offset { return &offset{in: p, x: x} }

// newPart places points + 1 Chebyshev instants in an interval, both ends included.
func newPart(from, to *big.Rat, points int) *part {
	p := &part{from: from, to: to, start: dd.FromRat(from), span: dd.FromRat(new(big.Rat).Sub(to, from))}
	for i := range points + 1 {
		p.nodes = append(p.nodes, p.at(chebyshevPoint(i, points)))
	}
	return p
}

// ladderStep is the ratio of the lengths of neighbouring parts after a switch of the effort.
const ladderStep = 4

// smoothParts cuts the tick at the instant where the effort switches, and the time since the switch
// at τ, 4τ, 16τ, … of the plant's fastest mode τ: a mode far faster than the tick has all of its transient in the first
// of them, and each is smooth for its few points.
func (a *heldAt) smoothParts() []*part {
	if a.cut != nil {
		return a.cut
	}
	T := a.period
	at := remainder(new(big.Rat).Add(a.delay, a.deadTime), T)
	bounds := []*big.Rat{new(big.Rat), T}
	if at.Sign() > 0 {
		bounds = append(bounds, at)
	}
	tick, _ := T.Float64()
	for since := a.shortest; since > 0 && since < tick; since *= ladderStep {
		x := new(big.Rat).SetFloat64(since)
		x.Add(x, at)
		if x.Cmp(T) >= 0 {
			x.Sub(x, T)
		}
		bounds = append(bounds, x)
	}
	slices.SortFunc(bounds, (*big.Rat).Cmp)
	for i := 1; i < len(bounds); i++ {
		if bounds[i-1].Cmp(bounds[i]) == 0 {
			continue
		}
		width, _ := new(big.Rat).Sub(bounds[i], bounds[i-1]).Float64()
		p := newPart(bounds[i-1], bounds[i], pointsFor(a.fastest, a.shortest, width))
		a.look(p)
		a.cut = append(a.cut, p)
	}
	return a.cut
}

// pointsFor is the number of Chebyshev points for modes up to fastest rad/s, the shortest of time constant shortest (0: none), over
// width seconds: for a smooth arc as many as bring the last coefficients of e^(−x), x up to width/shortest, below 1e-11 of
// its range (a_k = 2·(x/4)^k/k!), and two per radian on top, at most 200.
func pointsFor(fastest, shortest, width float64) int {
	smooth := 12.0
	if shortest > 0 && width < shortest/8 {
		smooth = 9
	}
	return int(math.Min(200, smooth+2*fastest*width))
}

// remainder is total mod T, exact.
func remainder(total, T *big.Rat) *big.Rat {
	q := new(big.Rat).Quo(total, T)
	n := new(big.Int).Div(q.Num(), q.Denom())
	return new(big.Rat).Sub(total, new(big.Rat).Mul(new(big.Rat).SetInt(n), T))
}
