package lti

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// reference is one loop of testdata/reference.json: 60-digit arithmetic by
// mpmath, made by testdata/reference.py with other methods than the package's.
type reference struct {
	Name           string      `json:"name"`
	Period         string      `json:"period"`
	Ticks          int         `json:"ticks"`
	Dead           string      `json:"dead"`
	OriginPoles    int         `json:"origin_poles"`
	OriginZeros    int         `json:"origin_zeros"`
	Num            []string    `json:"num"`
	Poles          [][2]string `json:"poles"`
	GainCrossings  [][2]string `json:"gain_crossings"`  // ω, phase margin
	PhaseCrossings [][2]string `json:"phase_crossings"` // ω, |L|
	Modulus        string      `json:"modulus"`
	DelayMargin    string      `json:"delay_margin"`
	Unstable       *int        `json:"unstable"`
	Equivalent     [][2]string `json:"equivalent"` // Im >= 0, rightmost first
	Series         []string    `json:"series"`     // of 1/(1+L)
}

func references(t testing.TB) []reference {
	t.Helper()
	b, err := os.ReadFile("testdata/reference.json")
	if err != nil {
		t.Fatal(err)
	}
	var list []reference
	if err := json.Unmarshal(b, &list); err != nil {
		t.Fatal(err)
	}
	if len(list) < 60 {
		t.Fatalf("only %d loops", len(list))
	}
	return list
}

func (r reference) tf(t testing.TB) TF {
	g := TF{
		OriginPoles: r.OriginPoles, OriginZeros: r.OriginZeros,
		Period: num(t, r.Period), Ticks: r.Ticks, DeadTime: num(t, r.Dead),
	}
	for _, c := range r.Num {
		g.Num = append(g.Num, num(t, c))
	}
	for _, p := range r.Poles {
		g.Poles = append(g.Poles, dd.Complex{Re: num(t, p[0]), Im: num(t, p[1])})
	}
	return g
}

// Targets of the design: margins and equivalent poles 1e-8, series 1e-11. What is
// reached is far better, and held here so that a loss is seen: crossings and margins are
// evaluated in double-double at a frequency of float64, worth a rounding or two
// times ω·d(arg L)/dω (up to 1e4 beside the modes of the set).
const (
	marginTol = 1e-11
	poleTol   = 1e-14
)

func TestReferenceMargins(t *testing.T) {
	for _, r := range references(t) {
		l := r.tf(t)
		a, err := Analyze(l, 64)
		if err != nil {
			t.Errorf("%s: %v", r.Name, err)
			continue
		}
		if r.Unstable != nil && (a.Unstable != *r.Unstable || a.Poles.Unstable != *r.Unstable || a.Marginal) {
			t.Errorf("%s: %d unstable by argument (marginal %v), %d by poles, want %d", r.Name, a.Unstable, a.Marginal, a.Poles.Unstable, *r.Unstable)
		}
		if a.Unstable != a.Poles.Unstable || !a.Poles.Complete {
			t.Errorf("%s: verdicts differ, or poles are missing: %d, %d, complete %v", r.Name, a.Unstable, a.Poles.Unstable, a.Poles.Complete)
		}
		m := a.Margins
		if len(m.GainCrossings) != len(r.GainCrossings) {
			t.Errorf("%s: %d gain crossings, want %d", r.Name, len(m.GainCrossings), len(r.GainCrossings))
			continue
		}
		for i, c := range r.GainCrossings {
			wantNear(t, r.Name+": gain crossing", m.GainCrossings[i].W, num(t, c[0]).Float64(), marginTol)
			wantNear(t, r.Name+": phase margin", m.GainCrossings[i].Margin, num(t, c[1]).Float64(), marginTol)
		}
		wantNear(t, r.Name+": modulus margin", m.Modulus, num(t, r.Modulus).Float64(), marginTol)
		if a.Stable && r.DelayMargin != "inf" {
			wantNear(t, r.Name+": delay margin", m.DelayMargin, num(t, r.DelayMargin).Float64(), marginTol)
		}
		r.comparePhaseCrossings(t, m, a.Stable)
	}
}

// comparePhaseCrossings holds the crossings listed, which of a loop with delay are
// those that matter, and the gain margins that follow from all of them.
func (r reference) comparePhaseCrossings(t *testing.T, m MarginSet, stable bool) {
	up, down, near := math.Inf(1), 0.0, 0.0
	for _, c := range r.PhaseCrossings {
		ratio := 1 / num(t, c[1]).Float64()
		if ratio > 1 {
			up = math.Min(up, ratio)
		} else {
			down, near = math.Max(down, ratio), math.Max(near, ratio)
		}
	}
	if !stable {
		up, down = near, 0
	}
	wantNear(t, r.Name+": gain margin", m.GainMargin, up, marginTol)
	wantNear(t, r.Name+": gain reduction", m.GainReduction, down, marginTol)
	if r.Ticks <= 8 && r.Dead == "0.0" && len(m.PhaseCrossings) != len(r.PhaseCrossings) {
		t.Errorf("%s: %d phase crossings, want %d", r.Name, len(m.PhaseCrossings), len(r.PhaseCrossings))
		return
	}
	for i := range min(len(m.PhaseCrossings), len(r.PhaseCrossings)) {
		if r.Ticks <= 8 && r.Dead == "0.0" {
			c := r.PhaseCrossings[i]
			wantNear(t, r.Name+": phase crossing", m.PhaseCrossings[i].W, num(t, c[0]).Float64(), marginTol)
			wantNear(t, r.Name+": gain at the phase crossing", m.PhaseCrossings[i].Gain, num(t, c[1]).Float64(), marginTol)
		}
	}
}

func TestReferencePoles(t *testing.T) {
	for _, r := range references(t) {
		if r.Equivalent == nil {
			continue
		}
		p, err := ClosedPoles(r.tf(t), 64)
		if err != nil {
			t.Errorf("%s: %v", r.Name, err)
			continue
		}
		got := upper(p.Equivalent)
		if len(got) != len(r.Equivalent) {
			t.Errorf("%s: %d poles with Im >= 0, want %d", r.Name, len(got), len(r.Equivalent))
			continue
		}
		for _, want := range r.Equivalent {
			w := complex(num(t, want[0]).Float64(), num(t, want[1]).Float64())
			if gap := nearestGap(got, w); !(gap <= poleTol) {
				t.Errorf("%s: no pole at %v, the nearest is %.2g away (relative)", r.Name, w, gap)
			}
		}
	}
}

func upper(list []complex128) []complex128 {
	var out []complex128
	for _, s := range list {
		if imag(s) >= 0 {
			out = append(out, s)
		}
	}
	return out
}

// nearestGap compares real and imaginary parts each against the modulus.
func nearestGap(list []complex128, w complex128) float64 {
	best := math.Inf(1)
	for _, s := range list {
		best = math.Min(best, math.Hypot(real(s-w), imag(s-w))/math.Hypot(real(w), imag(w)))
	}
	return best
}

func TestReferenceSeries(t *testing.T) {
	for _, r := range references(t) {
		l := r.tf(t)
		s := unity(Constant(dd.One, l.Period), l)
		for name, c := range map[string][]dd.Float{
			"series": s.TrackingSeries(4), "loop": s.LoopErrorSeries(4), "coefficients": s.TrackingByCoefficients(4),
		} {
			for k, want := range r.Series {
				// far better than the target of 1e-11: the coefficients are double-double
				wantNear(t, r.Name+": "+name, c[k].Float64(), num(t, want).Float64(), 1e-15)
			}
			if leading := leadingZeros(c); leading != min(r.OriginPoles, 4) {
				t.Errorf("%s: %s begins with %d exact zeros, want %d", r.Name, name, leading, r.OriginPoles)
			}
		}
	}
}

func leadingZeros(c []dd.Float) int {
	for k, v := range c {
		if v.Sign() != 0 {
			return k
		}
	}
	return len(c)
}

// TestReferenceInFloat64 shows what the set is about: evaluated with coefficients in
// z and float64, loops at fast rates lose the crossing or its phase altogether.
func TestReferenceInFloat64(t *testing.T) {
	lost := 0
	for _, r := range references(t) {
		T := num(t, r.Period).Float64()
		if T == 0 || T > 1e-5 || len(r.GainCrossings) == 0 {
			continue
		}
		den := []float64{1}
		for range r.OriginPoles {
			den = timesMonic(den, 1)
		}
		l := r.tf(t)
		full := poly.FromRoots(l.Poles)
		dz := substitute(full, l.Period)
		c := r.GainCrossings[0]
		z := complex(math.Cos(num(t, c[0]).Float64()*T), math.Sin(num(t, c[0]).Float64()*T))
		d := horner(den, z) * horner(dz, z)
		n := horner(substitute(l.Num, l.Period), z)
		order := len(l.Poles) + r.OriginPoles - l.Num.Degree()
		g := n / d * complex(math.Pow(T, float64(order)), 0)
		if !(math.Abs(math.Hypot(real(g), imag(g))-1) <= 1e-3) {
			lost++
		}
	}
	if lost < 3 {
		t.Errorf("only %d loops lost: the set does not show the difficulty", lost)
	}
}

// substitute returns T^n·p((z−1)/T) in float64 coefficients of z, ascending.
func substitute(p poly.Poly, period dd.Float) []float64 {
	out := poly.Poly{}
	n := p.Degree()
	scale := dd.One
	for i := n; i >= 0; i-- {
		out = out.Mul(poly.Poly{dd.New(-1), dd.One}).Add(poly.Const(p[i].Mul(scale)))
		scale = scale.Mul(period)
	}
	f := make([]float64, len(out))
	for i, c := range out {
		f[i] = c.Float64()
	}
	return f
}

func timesMonic(p []float64, root float64) []float64 {
	out := make([]float64, len(p)+1)
	for i, c := range p {
		out[i+1] += c
		out[i] -= root * c
	}
	return out
}

func horner(p []float64, z complex128) complex128 {
	var v complex128
	for i := len(p) - 1; i >= 0; i-- {
		v = v*z + complex(p[i], 0)
	}
	return v
}
