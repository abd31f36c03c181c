package sim

import (
	"context"
	"errors"
	"math"
	"testing"
)

// scripted runs a plant under efforts given for each tick: a feedforward of 1 on a reference of steps.
func scripted(t testing.TB, cfg PlantConfig, T string, efforts []float64, ticks int64) Config {
	t.Helper()
	s, err := NewPlantWith(cfg)
	if err != nil {
		t.Fatal(err)
	}
	ff := inZ(t, rats("1"), one(), T)
	c, err := NewController(ControllerConfig{Period: rat(T), Feedforward: &ff})
	if err != nil {
		t.Fatal(err)
	}
	period, _ := rat(T).Float64()
	var times, values []float64
	for k, u := range efforts {
		at := float64(k) * period
		if k > 0 {
			times, values = append(times, at), append(values, efforts[k-1])
		}
		times, values = append(times, at), append(values, u)
	}
	r, err := Table(times, values)
	if err != nil {
		t.Fatal(err)
	}
	return Config{
		System: s, Reference: r, Ticks: ticks,
		Tasks: []Task{{Period: rat(T), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	}
}

func mass(t testing.TB) PlantConfig {
	return PlantConfig{Plant: model(t, rats("1"), rats("1", "0", "0"), "0"), Sensor: unit(t), Friction: true}
}

// A mass of 1 with dry friction of 1/2, by hand: u = 0.4 does not move it; 1.5 from t = 1 accelerates it by 1; with
// 0.25 from t = 2 it slows down by 0.25 from v = 1 and stands at t = 6, at 0.5 + 2; −1 from t = 7 takes it back by 0.5.
func TestMassWithDryFriction(t *testing.T) {
	cfg := scripted(t, mass(t), "1", []float64{0.4, 1.5, 0.25, 0.25, 0.25, 0.25, 0.25, -1, -1}, 9)
	cfg.Friction = &Friction{Coulomb: 0.5, Static: 0.5}
	tr := run(t, cfg)
	for i, at := range tr.T {
		want := 0.0
		switch {
		case at > 7:
			want = 2.5 - (at-7)*(at-7)/4
		case at > 6:
			want = 2.5
		case at > 2:
			want = 0.5 + (at - 2) - (at-2)*(at-2)/8
		case at > 1:
			want = (at - 1) * (at - 1) / 2
		}
		if !(math.Abs(tr.Y[i]-want) <= 1e-13) { // some roundings of 2.5
			t.Fatalf("y(%v) = %v, want %v", at, tr.Y[i], want)
		}
	}
	// A stop that is passed within a tick and turns at once: v = 1 at t = 2, then u = −1.5: it slows down by 2 and stands
	// at t = 2.5, y = 0.75, and goes back by 1.
	cfg = scripted(t, mass(t), "1", []float64{0, 1.5, -1.5, -1.5}, 4)
	cfg.Friction = &Friction{Coulomb: 0.5, Static: 0.5}
	near(t, "turned", run(t, cfg).FinalY, 0.75-1.5*1.5/2, 1e-14)
}

// Static friction above the dry one: u = 0.6 holds under 0.7; one tick of 0.8 breaks it loose, and 0.6 keeps it
// moving then, against 0.5.
func TestBreaksLoose(t *testing.T) {
	cfg := scripted(t, mass(t), "1", []float64{0.6, 0.8, 0.6, 0.6}, 4)
	cfg.Friction = &Friction{Coulomb: 0.5, Static: 0.7}
	tr := run(t, cfg)
	near(t, "holds", valueAt(t, tr, tr.Y, 1), 0, 0)
	near(t, "y", tr.FinalY, 0.15+0.3*2+0.1*4/2, 1e-14)
}

// A velocity, v' = −v + u − F with F = 0.2·sign v + 0.5·v: from rest under u = 2 it rises as 1.2·(1 − e^{−1.5t}); under
// u = −2 it falls from v1 to 0 at t0, where (v1 + 22/15)·e^{−1.5t0} = 22/15, and goes on below with the friction turned.
func TestVelocityWithFriction(t *testing.T) {
	p := PlantConfig{Plant: model(t, rats("1"), rats("1", "1"), "0"), Sensor: unit(t), Friction: true}
	cfg := scripted(t, p, "1/2", []float64{2, 2, -2, -2, -2}, 5)
	cfg.Friction = &Friction{Coulomb: 0.2, Static: 0.3, Viscous: 0.5, Velocity: true}
	tr := run(t, cfg)
	v1 := 1.2 * -math.Expm1(-1.5)
	near(t, "v1", valueAt(t, tr, tr.Y, 1), v1, 1e-15)
	const down, back = 2.2 / 1.5, 1.8 / 1.5
	t0 := math.Log((v1+down)/down) / 1.5
	near(t, "end", tr.FinalY, -back*-math.Expm1(-1.5*(1.5-t0)), 1e-14)
	// With u within the static friction it stays at 0 once it is there.
	cfg = scripted(t, p, "1/2", []float64{2, 2, -0.25, -0.25, -0.25, -0.25, -0.25, -0.25}, 8)
	cfg.Friction = &Friction{Coulomb: 0.2, Static: 0.3, Viscous: 0.5, Velocity: true}
	near(t, "rest", run(t, cfg).FinalY, 0, 1e-17)
}

// Friction behind a lag of the drive: force' = u − force, y” = force − F. Under u = 1 the force is 1 − e^{−t}; it breaks
// loose where that passes Fs = 0.5, t0 = ln 2, and then v = ∫(0.6 − e^{−t}), y = ∫v.
func TestFrictionBehindALag(t *testing.T) {
	through := model(t, rats("1"), rats("1", "0", "0"), "0")
	p := PlantConfig{Plant: model(t, rats("1"), rats("1", "1", "0", "0"), "0"), Sensor: unit(t), Friction: true, Through: &through}
	cfg := scripted(t, p, "1/4", []float64{1}, 12)
	cfg.Friction = &Friction{Coulomb: 0.4, Static: 0.5}
	tr := run(t, cfg)
	y := func(at float64) float64 {
		t0 := math.Ln2
		if at < t0 {
			return 0
		}
		// v = 0.6τ + e^{−t} − e^{−t0}, τ = t − t0
		tau := at - t0
		return 0.3*tau*tau - (math.Exp(-at) - math.Exp(-t0)) - math.Exp(-t0)*tau
	}
	for i, at := range tr.T {
		if !(math.Abs(tr.Y[i]-y(at)) <= 1e-14) {
			t.Fatalf("y(%v) = %v, want %v", at, tr.Y[i], y(at))
		}
	}
}

// A plant whose friction cannot act, and friction beside a dead time of the sensor, are refused.
func TestFrictionThatDoesNotFit(t *testing.T) {
	third := model(t, rats("1"), rats("1", "1", "0", "0"), "0")
	cfg := scripted(t, PlantConfig{Plant: third, Sensor: unit(t), Friction: true}, "1", []float64{1}, 3)
	cfg.Friction = &Friction{Coulomb: 1, Static: 1}
	if _, err := Run(context.Background(), cfg); !errors.Is(err, ErrMechanism) {
		t.Errorf("friction through three poles: %v", err)
	}
	late := PlantConfig{Plant: mass(t).Plant, Sensor: model(t, one(), one(), "0.5"), Friction: true}
	if _, err := NewPlantWith(late); !errors.Is(err, ErrMechanism) {
		t.Errorf("friction beside a dead time of the sensor: %v", err)
	}
	negative := PlantConfig{Plant: model(t, rats("-1"), rats("1", "0", "0"), "0"), Sensor: unit(t), Friction: true}
	cfg = scripted(t, negative, "1", []float64{1}, 3)
	cfg.Friction = &Friction{Coulomb: 1, Static: 1}
	if _, err := Run(context.Background(), cfg); !errors.Is(err, ErrMechanism) {
		t.Errorf("friction that accelerates backwards: %v", err)
	}
}

// Play of 0.4 behind x = u·t²/2 − …: y follows x − 0.2 up, stays while x turns round (here within a tick), and follows
// x + 0.2 down.
func TestPlayAtTheOutput(t *testing.T) {
	p := PlantConfig{Plant: model(t, rats("1"), rats("1", "0", "0"), "0"), Sensor: unit(t)}
	cfg := scripted(t, p, "1", []float64{1, -4, -4, 0}, 4)
	cfg.Play = &Play{Gap: 0.4}
	tr := run(t, cfg)
	x := func(at float64) float64 {
		switch {
		case at <= 1:
			return at * at / 2
		case at <= 3:
			return 0.5 + (at - 1) - 2*(at-1)*(at-1)
		}
		return 0.5 + 2 - 8 + (1-8)*(at-3)
	}
	top := x(1.25) // v = 1 − 4(t − 1)
	for i, at := range tr.T {
		want := math.Max(0, x(at)-0.2)
		if at > 1.25 {
			want = math.Min(top-0.2, x(at)+0.2)
		}
		if !(math.Abs(tr.Y[i]-want) <= 1e-14*5) {
			t.Fatalf("y(%v) = %v, want %v", at, tr.Y[i], want)
		}
	}
	// The sensor's lag follows the output behind the play: m' = y − m.
	p.Sensor = model(t, one(), rats("1", "1"), "0")
	cfg = scripted(t, p, "1", []float64{1, -4, -4, 0}, 2)
	cfg.Play = &Play{Gap: 0.4}
	m := run(t, cfg).FinalM
	want := 0.0
	for i, n := 0, 200_000; i < n; i++ { // ∫ e^{−(2−t)}·y dt by the midpoint rule: error 1e-11
		at := 2 * (float64(i) + 0.5) / float64(n)
		y := math.Max(0, x(at)-0.2)
		if at > 1.25 {
			y = math.Min(top-0.2, x(at)+0.2)
		}
		want += math.Exp(at-2) * y * 2 / float64(n)
	}
	near(t, "m", m, want, 1e-9)
}

// Friction of nothing and a play of nothing are the linear loop.
func TestMechanismOfNothing(t *testing.T) {
	plant := model(t, rats("1"), rats("1", "1", "0"), "0")
	sensor := model(t, one(), rats("0.01", "1"), "0")
	linear := proportional(t, plantOf(t, plant, sensor), "1/10", "1/30", "2", 200)
	want := run(t, linear)
	with := linear
	s, err := NewPlantWith(PlantConfig{Plant: plant, Sensor: sensor, Friction: true})
	if err != nil {
		t.Fatal(err)
	}
	with.System, with.Friction, with.Play = s, &Friction{}, &Play{}
	got := run(t, with)
	for k := range want.TickY {
		// The loop's signals are of order one; each law switch costs a few roundings.
		if !(math.Abs(got.TickY[k]-want.TickY[k]) <= 1e-12) {
			t.Fatalf("y[%d] = %v, linear %v", k, got.TickY[k], want.TickY[k])
		}
	}
	near(t, "rms", got.RMSError, want.RMSError, 1e-12)
}

// Step figures of a loop with friction are those of its own curve: a mass of 1 against 0.5 under held efforts, by hand. y = t²/2 up
// to t = 1, then it slows down by 0.9 and stands at 1 + 10/9, y = 1/2 + 1/1.8, held by −0.4.
func TestStepFiguresWithFriction(t *testing.T) {
	cfg := scripted(t, mass(t), "1", []float64{1.5, -0.4, -0.4, 0}, 4)
	cfg.Friction = &Friction{Coulomb: 0.5, Static: 0.5}
	final := 0.5 + 1/(2*0.9)
	f, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: final})
	if err != nil {
		t.Fatal(err)
	}
	up := func(level float64) float64 { // y = level·final on the first piece, or on the second
		y := level * final
		if y <= 0.5 {
			return math.Sqrt(2 * y)
		}
		return 1 + (1-math.Sqrt(1-1.8*(y-0.5)))/0.9
	}
	near(t, "rise", f.RiseTime.Value, up(0.9)-up(0.1), 1e-13)
	near(t, "settled", f.SettlingTime.Value, up(0.98), 1e-12)
	near(t, "overshoot", f.OvershootPercent.Value, 0, 0)
}
