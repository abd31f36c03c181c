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
	T    float64 // seconds
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
	s := &Scan{p: p, lead: p.lead.Float64(), T: g.Period.Float64()}
	s.dead = g.DeadTime.Float64() + s.T*float64(p.ticks)
	return s, nil
}

// At returns the response at ω rad/s, delay included; complex infinity at a pole.
func (s *Scan) At(w float64) complex128 {
	if s.p == nil {
		return 0
	}
	nu := s.p.nu(w)
	v := complex(s.lead, 0)
	scale := 0
	for i := range s.p.factors {
		c := &s.p.factors[i]
		d := complex(-c.a, (nu-c.b)-c.bLow)
		if c.sign > 0 {
			v *= d
		} else {
			v /= d
		}
		if m := math.Abs(real(v)) + math.Abs(imag(v)); !(m > 1e-100 && m < 1e100) {
			_, e := math.Frexp(m)
			v = complex(math.Ldexp(real(v), -e), math.Ldexp(imag(v), -e))
			scale += e
		}
	}
	for range s.p.e {
		v *= complex(0, nu)
	}
	for range -s.p.e {
		v /= complex(0, nu)
	}
	if scale != 0 {
		v = complex(math.Ldexp(real(v), scale), math.Ldexp(imag(v), scale))
	}
	if s.dead != 0 {
		v *= cmplx.Rect(1, -w*s.dead)
	}
	if cmplx.IsNaN(v) || cmplx.IsInf(v) {
		return cmplx.Inf()
	}
	return v
}

// SystemScan evaluates a feedback loop at many frequencies.
type SystemScan struct{ cr, cm, gy, gm *Scan }

// Scan prepares s. Errors as for TF.Scan.
func (s System) Scan() (*SystemScan, error) {
	out := &SystemScan{}
	for _, x := range []struct {
		g   TF
		dst **Scan
	}{{s.Cr, &out.cr}, {s.Cm, &out.cm}, {s.Gy, &out.gy}, {s.Gm, &out.gm}} {
		var err error
		if *x.dst, err = x.g.Scan(); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// Loop returns L at ω rad/s.
func (s *SystemScan) Loop(w float64) complex128 { return s.cm.At(w) * s.gm.At(w) }

// Tracking returns the response from r to y at ω > 0.
func (s *SystemScan) Tracking(w float64) complex128 {
	return closed(s.cr.At(w)*s.gy.At(w), s.Loop(w))
}

// Measured returns the response from r to m at ω > 0.
func (s *SystemScan) Measured(w float64) complex128 {
	return closed(s.cr.At(w)*s.gm.At(w), s.Loop(w))
}

// closed is f/(1 + l), complex infinity where that is not finite.
func closed(f, l complex128) complex128 {
	v := f / (1 + l)
	if cmplx.IsNaN(v) || cmplx.IsInf(v) {
		return cmplx.Inf()
	}
	return v
}
