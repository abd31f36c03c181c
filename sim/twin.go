package sim

import (
	"context"
	"errors"
	"math"

	"steadytick/sdomain"
)

// TwinTerm is one summand of the continuous controller,
//
//	Model · (Weight·F·r − m)
type TwinTerm struct {
	Model  sdomain.Model
	Weight float64
}

// TwinConfig describes the continuous loop as designed,
//
//	v = Σ Term + Feedforward·r,  u = v within Limits,  y = Plant·(u + d),  m = Sensor·y
//
// without sampling, hold, conversion or compute time; a slew limit and converters are left out as
// well. Models must be proper.
type TwinConfig struct {
	Plant, Sensor sdomain.Model
	Terms         []TwinTerm
	Prefilter     *sdomain.Model // nil is 1
	Feedforward   *sdomain.Model // nil is 0
	AntiWindup    AntiWindup     // Stop and Clamp, which are rules of programs, are followed as StopOutward
	TrackingTime  float64        // seconds, for Tracking, positive
	Limits        Limits
	Reference     Signal
	Disturbance   Signal  // at the plant input
	Duration      float64 // seconds, positive
	// Times are the instants of the trace, rising, from 0 to Duration; nil: 1001 equal steps.
	Times    []float64
	Step     *StepSpec // when set, asks for the step figures
	Progress func(part float64)
}

// TwinTrace is the continuous loop at the instants asked for; where a signal jumps, just after. All
// slices have equal length, that of the instants before the end (see Diverged).
type TwinTrace struct {
	T, R, Y, M, U []float64
	// FinalY and the others are the values at the end, FinalT.
	FinalT, FinalR, FinalY, FinalM, FinalU float64
	// The tracking error r − y over all time, not only the instants above.
	PeakError, PeakErrorTime, RMSError float64
	PeakEffort                         float64
	Step                               Figures
	// Diverged: a signal passed 1e100 and the run ended there.
	Diverged bool
	// Pieces is how many polynomial pieces the run took.
	Pieces int
}

// ErrTwinLength is a run that needs more pieces than maxPieces.
var ErrTwinLength = errors.New("the continuous loop changes too fast for so long a run")

// maxPieces bounds the work: a piece follows about a sixth of a period of the fastest
// oscillation that has not died out.
const maxPieces = 500_000

func (c *TwinConfig) check() error {
	if !(c.Duration > 0) || math.IsInf(c.Duration, 0) {
		return errors.New("the twin needs a positive duration")
	}
	if !c.Limits.valid() {
		return errors.New("limits that are not in order")
	}
	if c.AntiWindup == Tracking && !(c.TrackingTime > 0) {
		return errors.New("tracking needs a positive tracking time")
	}
	for _, t := range c.Terms {
		if !finite([]float64{t.Weight}) {
			return errors.New("a term needs a finite weight")
		}
	}
	if err := c.Reference.check(); err != nil {
		return err
	}
	if err := c.Disturbance.check(); err != nil {
		return err
	}
	if c.Step != nil {
		spec := *c.Step
		c.Step = &spec
		if err := spec.check(); err != nil {
			return err
		}
		*c.Step = spec
	}
	if c.Times == nil {
		for i := range 1001 {
			c.Times = append(c.Times, c.Duration*float64(i)/1000)
		}
	}
	for i, t := range c.Times {
		if !(t >= 0) || i > 0 && !(t >= c.Times[i-1]) || t > c.Duration*(1+1e-12) {
			return errors.New("the instants of the twin must rise from 0 to the duration")
		}
	}
	return nil
}

// twin is a run of the continuous loop in progress.
type twin struct {
	cfg     *TwinConfig
	model   *twinModel
	r       *radau
	lags    []float64
	rDelays []float64
	regimes map[int]*regime
	factors map[factored]*lu

	t       float64
	x       []float64
	past    history
	bounds  bounds
	sizes   []float64 // largest magnitude of each signal so far
	list    []*values
	out     *twinOut
	pieces  int
	length  float64 // to try next
	first   float64 // what resolved the signals after the last bound
	fresh   bool    // the next piece is the first after a bound
	wait    int     // pieces to pass before a longer one is tried again
	state   state
	stalled int // switches without time going on
}

// state is the mode of the loop.
type state struct {
	md     mode
	frozen bool // integrators stopped by anti-windup
	slide  bool // held on the limit: see next
}

// Twin simulates the continuous loop. The linear system of each mode (linear, at a limit,
// integrators stopped) is followed in polynomial pieces found by collocation, as long as they
// resolve every signal to 1e-12 of its size; pieces end where the effort meets or leaves a limit,
// at the kinks of the inputs and at their images after each dead time. Accuracy about 1e-11 of
// the largest values for loops whose modes die out. Errors: ctx.Err(), ErrIllPosed,
// ErrImproper, ErrRange, ErrTwinLength, mistakes in cfg.
func Twin(ctx context.Context, cfg TwinConfig) (*TwinTrace, error) {
	if err := cfg.check(); err != nil {
		return nil, err
	}
	m, err := newTwinModel(&cfg)
	if err != nil {
		return nil, err
	}
	w := newTwin(&cfg, m)
	diverged := false
	for w.t < cfg.Duration && !diverged {
		if w.pieces&255 == 0 {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			if cfg.Progress != nil {
				cfg.Progress(w.t / cfg.Duration)
			}
		}
		if w.pieces > maxPieces {
			return nil, ErrTwinLength
		}
		if diverged, err = w.advance(); err != nil {
			return nil, err
		}
	}
	if cfg.Progress != nil {
		cfg.Progress(1)
	}
	return w.out.trace(diverged, w.pieces), nil
}

func newTwin(cfg *TwinConfig, m *twinModel) *twin {
	w := &twin{
		cfg: cfg, model: m, r: radauTable(), regimes: map[int]*regime{}, factors: map[factored]*lu{},
		x: make([]float64, m.n), sizes: make([]float64, m.n+m.nq+3),
	}
	for _, d := range m.lags {
		v, _ := d.Float64()
		w.lags = append(w.lags, v)
		w.past.past = math.Max(w.past.past, v)
	}
	w.past.r = w.r
	for _, d := range m.rDelays {
		v, _ := d.Float64()
		w.rDelays = append(w.rDelays, v)
	}
	w.out = newTwinOut(w)
	w.bounds.put(bound{0, 0, true})
	for _, d := range w.rDelays {
		w.kinks(&cfg.Reference, d, true)
	}
	w.kinks(&cfg.Disturbance, 0, true)
	w.kinks(&cfg.Reference, -w.out.plantDelay, false) // where the error r − y has its kinks
	w.first = 1 / math.Max(w.norm(), 1/cfg.Duration)
	return w
}

// kinks makes pieces end where a signal is not smooth.
func (w *twin) kinks(s *Signal, delay float64, images bool) {
	for i, t := range s.Breakpoints() {
		order := 0.0
		if i > 0 {
			order = s.kink(i)
		}
		if t+delay <= w.cfg.Duration {
			w.bounds.put(bound{t + delay, order, images})
		}
	}
}

// kink is the lowest derivative that jumps at the start of piece i.
func (s *Signal) kink(i int) float64 {
	tau := s.starts[i] - s.starts[i-1]
	a, b := s.coef[i-1], s.coef[i]
	at := [4]float64{
		a[0] + tau*(a[1]+tau*(a[2]+tau*a[3])),
		a[1] + tau*(2*a[2]+tau*3*a[3]),
		a[2] + tau*3*a[3],
		a[3],
	}
	for k := range at {
		// Equal to rounding of the terms summed, and of the instant, is taken as equal.
		size := math.Abs(a[k]) + math.Abs(b[k])
		for j := k + 1; j < 4; j++ {
			size += math.Abs(a[j]) * math.Pow(tau, float64(j-k))
		}
		shift := 0.0
		if k < 3 {
			shift = 1e-15 * s.starts[i] * float64(k+1) * math.Abs(at[k+1])
		}
		if math.Abs(at[k]-b[k]) > 1e-12*size+shift {
			return float64(k)
		}
	}
	return 4
}

func (w *twin) norm() float64 {
	r := w.regime(state{})
	most := 0.0
	for i := range w.model.n {
		sum := 0.0
		for _, v := range r.a[i*w.model.n : (i+1)*w.model.n] {
			sum += math.Abs(v)
		}
		most = math.Max(most, sum)
	}
	return most
}

func (w *twin) regime(s state) *regime {
	key := 2 * int(s.md)
	if s.frozen || s.slide {
		key++
	}
	r := w.regimes[key]
	if r == nil {
		r = w.model.regime(s.md, s.frozen || s.slide)
		w.regimes[key] = r
	}
	return r
}

// advance takes one piece, or a switch of mode at the present instant.
func (w *twin) advance() (diverged bool, err error) {
	// Instants are one when they differ by the rounding of a dozen sums, or by nothing that matters
	// in the whole run.
	now := w.t + math.Max(4e-15*w.t, 1e-18*w.cfg.Duration)
	if order, any := w.bounds.take(now, w.lags, w.model.smoothing); any {
		w.length, w.fresh = w.first, true
		if order < 1 || w.model.smoothing < 1 {
			w.settle()
		}
	}
	room := w.cfg.Duration - w.t
	if len(w.bounds) > 0 {
		room = math.Min(room, w.bounds[0].t-w.t)
	}
	s, next, err := w.try(room)
	if err != nil {
		return false, err
	}
	return w.accept(s, next), nil
}

// rung is the longest length of the ladder Duration/2^k not above h.
func (w *twin) rung(h float64) float64 {
	_, e := math.Frexp(w.cfg.Duration / h * (1 - 1e-12))
	return math.Ldexp(w.cfg.Duration, -max(e, 0))
}

// try looks for a length that resolves the signals; next is the length to try after it.
func (w *twin) try(room float64) (s *stretch, next float64, err error) {
	h := w.rung(w.length)
	if h >= room*(1-1e-12) {
		h = room
	}
	reg := w.regime(w.state)
	last := math.Inf(1)
	for {
		s, ok := w.collocate(reg, h)
		rest := math.Inf(1)
		if ok {
			rest = w.unresolved(reg, s)
		}
		// A tail that no longer falls by 2^3 with half the length is rounding, not signal.
		if rest < 1e-9 && rest > last/8 {
			if last < 1e-9 {
				return s, 4 * h, nil // the length that failed was rounding, too
			}
			return s, 2 * h, nil
		}
		if rest <= resolved {
			return s, w.longer(h, rest, last), nil
		}
		if ok && w.gentle(reg, h) {
			return s, 2 * h, nil
		}
		if h < 1e-14*math.Max(w.t, w.cfg.Duration*1e-8) {
			return nil, 0, ErrTwinLength
		}
		last = rest
		h = w.rung(h / 2)
	}
}

// longer is the length to try after one of h with the tail rest: twice it where the tail leaves room. The
// tail is not allowed for in full (2^stages), as that is near the rounding; so a longer
// piece that fails is not tried again for some pieces. last is the tail of the length that
// failed, if one did.
func (w *twin) longer(h, rest, last float64) float64 {
	if w.fresh && !math.IsInf(last, 1) {
		w.first = h
	}
	switch {
	case w.fresh:
		w.wait = 0
	case !math.IsInf(last, 1):
		w.wait = 10
	case w.wait > 0:
		w.wait--
	}
	if rest > resolved/30 || w.wait > 0 {
		return h
	}
	if w.fresh {
		w.first = math.Max(w.first, 2*h)
	}
	return 2 * h
}

// accept takes over a stretch up to its first event.
func (w *twin) accept(s *stretch, next float64) (diverged bool) {
	theta, ev := w.event(s)
	if ev != nil && theta <= atOnce && w.stalled < maxStalled {
		w.stalled++
		w.enter(ev, s, 0)
		return false
	}
	w.stalled = 0
	w.pieces++
	p := piece{t: w.t, h: s.h, end: w.t + s.h, y: s.y, m: s.m, u: s.u}
	if ev != nil {
		p.end = w.t + theta*s.h
	}
	for i := range w.x {
		w.x[i] = s.x[i][stages]
		if ev != nil {
			w.x[i] = s.x[i].at(w.r, theta)
		}
	}
	if w.state.slide {
		w.hold(s, theta, ev != nil)
	}
	for i, v := range w.signals(s) {
		w.sizes[i] = math.Max(w.sizes[i], v.size())
	}
	w.length, w.fresh = next, false
	w.past.add(p)
	ok := w.out.take(&p)
	w.t = p.end
	if ev != nil {
		w.enter(ev, s, theta)
		w.bounds.put(bound{w.t, 1, true})
	}
	return !ok
}
