package sim

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// The motions below are computed by hand from the seven segments; all their times and values
// are small binary fractions or n/48, so 1e-15 is a rounding or two.
func TestMoveByHand(t *testing.T) {
	type point struct{ t, r float64 }
	for _, c := range []struct {
		name       string
		d, v, a, j float64
		duration   float64
		pieces     int
		points     []point
	}{
		// tj = a/j = 1/4, ta = v/a − tj = 1/4, tv = D/v − (2tj+ta) = 5/4.
		{"all limits", 2, 1, 2, 8, 2.75, 8, []point{
			{0.25, 1. / 48}, {0.5, 7. / 48}, {0.75, 0.375}, {1.375, 1}, {2, 1.625}, {2.25, 2 - 7./48}, {2.5, 2 - 1./48}, {3, 2}}},
		// The acceleration is not reached: tj = √(v/j) = 1/2, tv = D/v − 2tj = 1.
		{"no acceleration", 2, 1, 10, 4, 3, 6, []point{{0.5, 1. / 12}, {1, 0.5}, {1.5, 1}, {2, 1.5}, {2.5, 2 - 1./12}}},
		// The velocity is not reached: tj = 1, ta = −3/2 + √(1/4 + 6) = 1, D = j·tj·(tj+ta)(2tj+ta) = 6.
		{"no velocity", 6, 10, 1, 1, 6, 7, []point{{1, 1. / 6}, {2, 1./6 + 1./2 + 1./2}, {3, 3}, {5, 6 - 1./6}}},
		// Neither: tj = ∛(D/2j) = 1.
		{"neither", 2, 10, 10, 1, 4, 5, []point{{1, 1. / 6}, {2, 1}, {3, 2 - 1./6}}},
		{"backward", -2, 10, 10, 1, 4, 5, []point{{1, -1. / 6}, {2, -1}, {4, -2}}},
		// No limit of jerk: a trapezoid of velocity, ta = v/a = 1/2, tv = D/v − ta = 3/2.
		{"trapezoid", 2, 1, 2, math.Inf(1), 2.5, 4, []point{{0.5, 0.25}, {1.25, 1}, {2, 1.75}}},
		{"triangle", 2, 10, 2, math.Inf(1), 2, 3, []point{{1, 1}, {1.5, 1.75}}},
	} {
		t.Run(c.name, func(t *testing.T) {
			s, err := Move(c.d, c.v, c.a, c.j)
			if err != nil {
				t.Fatal(err)
			}
			near(t, "duration", s.Duration(), c.duration, 1e-15*c.duration)
			if got := len(s.Breakpoints()); got != c.pieces {
				t.Errorf("%d pieces, want %d: %v", got, c.pieces, s.Breakpoints())
			}
			for _, p := range c.points {
				near(t, "position", s.At(p.t), p.r, 2e-15)
			}
			if s.At(s.Duration()) != c.d || s.At(1e9) != c.d || s.At(-1) != 0 || s.At(0) != 0 {
				t.Errorf("start or end is not exact: %v, %v", s.At(0), s.At(s.Duration()))
			}
		})
	}
}

// Every motion keeps its limits, is continuous with velocity and acceleration, and ends at the
// distance.
func TestMoveKeepsLimits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		size := func(name string) float64 { return math.Exp(rapid.Float64Range(-7, 7).Draw(t, name)) }
		d, v, a, j := size("distance"), size("velocity"), size("acceleration"), size("jerk")
		s, err := Move(d, v, a, j)
		if err != nil {
			t.Fatal(err)
		}
		end := s.Duration()
		// A few roundings of numbers up to the limit itself, with room for ta from a difference of
		// close numbers; and the instants, which are rounded to half a last place of the end.
		const slack = 1 + 1e-9
		ulp := 4e-16 * end
		for i := range s.starts {
			if i > 0 && s.kink(i) < 3 {
				t.Fatalf("derivative %g jumps at %g", s.kink(i), s.starts[i])
			}
			stop := end
			if i+1 < len(s.starts) {
				stop = s.starts[i+1]
			}
			c := s.coef[i]
			for _, tau := range []float64{0, (stop - s.starts[i]) / 2, stop - s.starts[i]} {
				vel, acc := c[1]+tau*(2*c[2]+tau*3*c[3]), 2*c[2]+6*c[3]*tau
				if !(math.Abs(vel) <= v*slack+a*ulp) || !(math.Abs(acc) <= a*slack+j*ulp) || !(math.Abs(6*c[3]) <= j*slack) {
					t.Fatalf("piece %d: velocity %g of %g, acceleration %g of %g, jerk %g of %g", i, vel, v, acc, a, 6*c[3], j)
				}
			}
		}
		if s.At(end) != d {
			t.Fatalf("ends at %v, want %v", s.At(end), d)
		}
	})
}

func TestMoveErrors(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range [][4]float64{
		{nan, 1, 1, 1}, {inf, 1, 1, 1}, {1, nan, 1, 1}, {1, 1, inf, 1}, {1, 1, 1, nan}, {1, 0, 1, 1}, {1, 1, -1, 1}, {1, 1, 1, 0},
		{1e300, 1e-300, 1e-300, 1e300},
	} {
		if s, err := Move(c[0], c[1], c[2], c[3]); err == nil {
			t.Errorf("Move%v has no error, ends at %g", c, s.Duration())
		} else if !errors.Is(err, ErrSignal) {
			t.Errorf("Move%v: %v", c, err)
		}
	}
	if s, err := Move(0, 1, 1, 1); err != nil || !s.IsZero() {
		t.Errorf("no distance: %v", err)
	}
}

func TestTable(t *testing.T) {
	s, err := Table([]float64{1, 2, 2, 4}, []float64{3, 5, -1, 0})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range [][2]float64{{-1, 0}, {0.99, 0}, {1, 3}, {1.5, 4}, {2, -1}, {3, -0.5}, {4, 0}, {9, 0}} {
		if got := s.At(c[0]); got != c[1] {
			t.Errorf("at %g: %g, want %g", c[0], got, c[1])
		}
	}
	if s.Duration() != 4 {
		t.Errorf("duration %g", s.Duration())
	}
	for _, bad := range [][2][]float64{
		{nil, nil}, {{1}, {1, 2}}, {{2, 1}, {0, 0}}, {{-1}, {0}}, {{math.NaN()}, {0}}, {{0, 1}, {0, math.Inf(1)}},
		{{0, 5e-324}, {-1e300, 1e300}},
	} {
		if _, err := Table(bad[0], bad[1]); !errors.Is(err, ErrSignal) {
			t.Errorf("Table%v: error %v", bad, err)
		}
	}
}

func TestSimpleSignals(t *testing.T) {
	for _, c := range []struct {
		s       Signal
		t, want float64
	}{
		{Step(2), 0, 2}, {Step(2), -1e-9, 0}, {Ramp(2), 3, 6}, {Parabola(2), 3, 9}, {Zero(), 5, 0},
		{Sine(2, 0.5), math.Pi, 2}, {Sine(2, -0.5), math.Pi, -2}, {Sine(2, 0), 1, 0}, {Sine(2, 1), -1, 0},
	} {
		if got := c.s.At(c.t); got != c.want {
			t.Errorf("%+v at %g: %g, want %g", c.s, c.t, got, c.want)
		}
	}
	for _, s := range []Signal{Step(math.NaN()), Ramp(math.Inf(1)), Sine(1, math.NaN()), Sine(math.Inf(-1), 1)} {
		if err := s.check(); !errors.Is(err, ErrSignal) {
			t.Errorf("%+v: error %v", s, err)
		}
	}
}
