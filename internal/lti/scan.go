package lti

import (
	"math"
	"math/cmplx"
)

// Scan evaluates a transfer function at many frequencies in float64. Zeros are found
// once; each factor is then good to a few roundings, so the result is within about
// 1e-15 times the number of factors, times |x|/|x − p| beside a lightly damped root p
// (as a rounding of ω itself would cost); a delay of n ticks adds n·ωT·1e-16 to the phase.
type Scan struct {
	p    *plane // nil for the zero function
	lead float64
	dead float64 // seconds of delay
}

// Scan prepares g. Errors: ErrImproper, ErrRange and those of poly.Roots.
func (g TF) Scan() (*Scan, error) {
	if g.IsZero() {
		return &Scan{}, nil
	}
	f, err := g.factor()
	if err != nil {
		return nil, err
	}
	p, err := newPlane(f)
	if err != nil {
		return nil, err
	}
	return p.scan(), nil
}

// scan evaluates the function of a plane.
func (p *plane) scan() *Scan {
	T := math.Ldexp(p.period, -p.scale)
	return &Scan{p: p, lead: p.leadFloat, dead: math.Ldexp(p.dead, -p.scale) + T*float64(p.ticks)}
}

// At returns the response at ω rad/s, delay included; complex infinity at a pole.
func (s *Scan) At(w float64) complex128 {
	if s.p == nil {
		return 0
	}
	nu := s.p.nu(w)
	l := product{v: complex(s.lead, 0)}
	for i := range s.p.factors {
		c := &s.p.factors[i]
		u := (nu - c.b) - c.bLow
		if c.sign > 0 {
			l.times(-c.a, u)
			continue
		}
		d := u*u + c.a*c.a
		l.times(-c.a/d, -u/d)
	}
	for range s.p.e {
		l.times(0, nu)
	}
	for range -s.p.e {
		l.times(0, -1/nu)
	}
	v := l.value()
	if s.dead != 0 {
		v *= cmplx.Rect(1, -w*s.dead)
	}
	if cmplx.IsNaN(v) || cmplx.IsInf(v) {
		return cmplx.Inf()
	}
	return v
}

// SystemScan evaluates a feedback loop at many frequencies.
type SystemScan struct {
	cr, cm, gy, gm *Scan // cr is cm where the controller acts on r − m alone
	sensor         complex128
	static         bool // gm is sensor·gy
}

// Scan prepares s. Errors as for TF.Scan.
func (s System) Scan() (*SystemScan, error) {
	out := &SystemScan{}
	var err error
	if out.cm, err = s.Cm.Scan(); err != nil {
		return nil, err
	}
	if out.gy, err = s.Gy.Scan(); err != nil {
		return nil, err
	}
	if out.cr = out.cm; !s.OneDegree {
		if out.cr, err = s.Cr.Scan(); err != nil {
			return nil, err
		}
	}
	if s.StaticSensor != nil {
		out.sensor, out.static = complex(s.StaticSensor.Float64(), 0), true
		return out, nil
	}
	out.gm, err = s.Gm.Scan()
	return out, err
}

// parts returns Cr, Gy, Gm and L at ω rad/s.
func (s *SystemScan) parts(w float64) (cr, gy, gm, l complex128) {
	gy = s.gy.At(w)
	if gm = s.sensor * gy; !s.static {
		gm = s.gm.At(w)
	}
	cm := s.cm.At(w)
	if cr = cm; s.cr != s.cm {
		cr = s.cr.At(w)
	}
	return cr, gy, gm, cm * gm
}

// Loop returns L at ω rad/s.
func (s *SystemScan) Loop(w float64) complex128 {
	_, _, _, l := s.parts(w)
	return l
}

// Tracking returns the response from r to y at ω > 0.
func (s *SystemScan) Tracking(w float64) complex128 {
	cr, gy, _, l := s.parts(w)
	return closed(cr*gy, l)
}

// Measured returns the response from r to m at ω > 0.
func (s *SystemScan) Measured(w float64) complex128 {
	cr, _, gm, l := s.parts(w)
	return closed(cr*gm, l)
}

// closed is f/(1 + l), complex infinity where that is not finite.
func closed(f, l complex128) complex128 {
	v := f / (1 + l)
	if cmplx.IsNaN(v) || cmplx.IsInf(v) {
		return cmplx.Inf()
	}
	return v
}
