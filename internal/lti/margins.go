package lti

import (
	"math"

	"steadytick/internal/dd"
)

// Crossing is a frequency where |L| = 1 or where L is negative real.
type Crossing struct {
	W       float64 // rad/s; π/T is possible, infinity is not
	Gain    float64 // |L|
	Phase   float64 // arg L in (−π, π]
	Margin  float64 // phase above −180° in (−π, π], rad (gain crossings only)
	Falling bool    // |L| falls through 1 there as ω rises (gain crossings only)
}

// MarginSet holds the margins of a loop L. Frequencies in rad/s, angles in rad.
type MarginSet struct {
	GainCrossings  []Crossing // every ω > 0 with |L| = 1, ascending
	PhaseCrossings []Crossing // ω >= 0 with L < 0, ascending; see phaseCrossings for what may be left out

	// PhaseMargin: of a stable loop the crossing's margin of least magnitude, of an
	// unstable one the most negative (least). Without gain crossings +Inf.
	PhaseMargin float64
	// GainMargin is a ratio. Of a stable loop the least 1/|L| > 1 at a phase crossing,
	// +Inf without one. Of an unstable loop 1/|L| <= 1 of the crossing whose gain is
	// nearest to 1, 0 when there is none.
	GainMargin float64
	// GainReduction is the greatest 1/|L| < 1 at a phase crossing of a stable loop: how far
	// the gain may fall. 0 when there is none.
	GainReduction float64
	// Modulus is the least |1 + L| over all frequencies, the limit at infinity
	// included, and ModulusW where it is (+Inf: at infinity).
	Modulus, ModulusW float64
	// DelayMargin is, for a stable loop, the least (phase above −180°, in (0, 2π])/ω over gain
	// crossings, seconds; +Inf without one; 0 when |L| >= 1 at infinite frequency in the
	// continuous domain, where any delay destabilizes; 0 for an unstable loop.
	DelayMargin float64
	// Crossover is the lowest frequency where |L| falls through 1.
	Crossover    float64
	HasCrossover bool
}

// Margins returns the margins of L. stable is the caller's verdict on the closed loop; it
// selects the definitions above. Frequencies and margins are good to about 1e-12
// relative, the positions of crossings refined in double-double; where |L| or the phase meets its
// level at a tangent, the two crossings that become one are known to about 1e-7.
// Errors: ErrImproper, ErrAlgebraic, ErrRange and those of poly.Roots.
func Margins(l TF, stable bool) (MarginSet, error) {
	if l.IsZero() {
		return noMargins(stable), nil
	}
	p, err := prepare(l)
	if err != nil {
		return MarginSet{}, err
	}
	return p.margins(l, p.gainCrossings(), stable), nil
}

// noMargins are the margins of L = 0.
func noMargins(stable bool) MarginSet {
	m := MarginSet{PhaseMargin: math.Inf(1), Modulus: 1}
	if stable {
		m.GainMargin, m.DelayMargin = math.Inf(1), math.Inf(1)
	}
	return m
}

func (p *plane) margins(l TF, gains []float64, stable bool) MarginSet {
	m := noMargins(stable)
	for _, nu := range gains {
		if c := p.gainCrossing(l, nu); c.W > 0 && !math.IsInf(c.W, 1) {
			m.GainCrossings = append(m.GainCrossings, c)
		}
	}
	last := 0.0
	if len(gains) > 0 {
		last = gains[len(gains)-1]
	}
	phases := p.phaseCrossings(last)
	m.PhaseCrossings = p.listPhaseCrossings(l, phases)
	m.fillPhase(stable)
	m.fillGain(stable)
	if c, ok := p.reversedLimit(); ok {
		m.offerGain(c, stable)
	}
	if stable && p.period == 0 && p.slope() == 0 && p.logK >= 0 {
		m.DelayMargin = 0
	}
	nu := 0.0
	m.Modulus, nu = p.modulus(append(gains, phases...))
	m.ModulusW = math.Inf(1)
	if !math.IsInf(nu, 1) {
		m.ModulusW = p.omega(nu)
		if nu > 0 {
			if v := l.response(dd.New(m.ModulusW)); v.IsFinite() {
				m.Modulus = magnitude(v.Add(dd.Real(dd.One)))
			}
		}
	} else if p.period != 0 {
		m.ModulusW = p.omega(nu)
	}
	return m
}

func (p *plane) gainCrossing(l TF, nu float64) Crossing {
	at := refineGain(l, p, nu)
	_, df := p.gain(nu)
	return Crossing{
		W: at.w.Float64(), Gain: 1, Falling: df < 0,
		Phase:  phaseOf(at.l),
		Margin: reversePhase(at.l),
	}
}

// phaseOf is arg v in (−π, π].
func phaseOf(v dd.Complex) float64 { return reversePhase(v.Neg()) }

// refinedCrossings is how many phase crossings are refined in double-double. A loop
// with a long delay has thousands, each with a steep phase, where float64 is as good.
const refinedCrossings = 40

// listPhaseCrossings adds rest and half the sampling rate, where L is real too.
func (p *plane) listPhaseCrossings(l TF, nus []float64) []Crossing {
	var out []Crossing
	if p.e == 0 && p.start().reversed() {
		f, _ := p.gain(0)
		out = append(out, Crossing{W: 0, Gain: math.Exp(f), Phase: math.Pi})
	}
	for _, nu := range nus {
		f, _ := p.gain(nu)
		c := Crossing{W: p.omega(nu), Gain: math.Exp(f), Phase: math.Pi}
		if len(nus) <= refinedCrossings || math.Abs(f) < 0.5 {
			at := refinePhase(l, p, nu)
			c.W, c.Gain = at.w.Float64(), magnitude(at.l)
		}
		out = append(out, c)
	}
	if p.period != 0 && p.slope() == 0 && p.end().reversed() {
		out = append(out, Crossing{W: p.omega(math.Inf(1)), Gain: math.Exp(p.logK), Phase: math.Pi})
	}
	return out
}

// magnitude is |v|, to float64 rounding, without leaving its range.
func magnitude(v dd.Complex) float64 { return math.Hypot(v.Re.Float64(), v.Im.Float64()) }

// reversedLimit is |L(∞)| of a continuous loop that is negative there, or that has dead time:
// a gain above 1/|L(∞)| cannot be closed.
func (p *plane) reversedLimit() (float64, bool) {
	if p.period != 0 || p.slope() != 0 {
		return 0, false
	}
	return math.Exp(p.logK), p.dead != 0 || p.end().reversed()
}

func (m *MarginSet) fillPhase(stable bool) {
	for _, c := range m.GainCrossings {
		switch {
		case math.IsInf(m.PhaseMargin, 1),
			stable && math.Abs(c.Margin) < math.Abs(m.PhaseMargin),
			!stable && c.Margin < m.PhaseMargin:
			m.PhaseMargin = c.Margin
		}
		if c.Falling && !m.HasCrossover {
			m.Crossover, m.HasCrossover = c.W, true
		}
		above := c.Margin
		if above <= 0 {
			above += 2 * math.Pi
		}
		if stable {
			m.DelayMargin = math.Min(m.DelayMargin, above/c.W)
		}
	}
}

func (m *MarginSet) fillGain(stable bool) {
	for _, c := range m.PhaseCrossings {
		m.offerGain(c.Gain, stable)
	}
}

// offerGain takes |L| at a phase crossing into the gain margins.
func (m *MarginSet) offerGain(gain float64, stable bool) {
	ratio := 1 / gain
	switch {
	case stable && ratio > 1:
		m.GainMargin = math.Min(m.GainMargin, ratio)
	case ratio <= 1+touching && stable:
		m.GainReduction = math.Max(m.GainReduction, ratio)
	case ratio <= 1+touching:
		m.GainMargin = math.Max(m.GainMargin, ratio)
	}
}
