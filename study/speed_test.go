package study

import (
	"bufio"
	"encoding/json"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// The yardstick of BenchmarkSweep, testdata/speed/sweep.py with NumPy 1.24 and SciPy 1.10, does the same work: its
// figures are those of the program. Tolerances: its polynomials in z lose digits near z = 1, about 1/Π|1 − p| over the ten roots of
// a closed-loop fraction, at 80 to 150 Hz eight to nine of sixteen, and frequencies are refined to 1e-12, so that 1e-6 is left (at
// 500 Hz its series are already wrong in the sixth digit, at 1 kHz in the first). The ripple is read off 400 points a part,
// (π/400)²/8 = 8e-6 of its height at most.
func TestSpeedYardstickDoesTheSameWork(t *testing.T) {
	const python = "/usr/bin/python3"
	if err := exec.Command(python, "-c", "import numpy, scipy").Run(); err != nil {
		if os.Getenv("STEADYTICK_CHECK") == "1" {
			t.Fatal("missing: NumPy and SciPy for ", python)
		}
		t.Skip("missing: NumPy and SciPy")
	}
	out := filepath.Join(t.TempDir(), "sweep.jsonl")
	cmd := exec.Command(python, "../testdata/speed/sweep.py", "--rates", "5", "--from", "80", "--to", "150", "--json", out)
	if text, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	f, err := os.Open(out)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	l := parsed(t, orderSix)
	s, maps := sevenMaps(t, l)
	rows := 0
	for scan := bufio.NewScanner(f); scan.Scan(); rows++ {
		var row struct {
			RateHz  float64 `json:"rate_hz"`
			Map     string
			Metrics map[string]json.RawMessage
		}
		text := strings.ReplaceAll(scan.Text(), "Infinity", `"inf"`) // Python's JSON is not the standard's
		if err := json.Unmarshal([]byte(text), &row); err != nil {
			t.Fatal(err)
		}
		for _, m := range maps {
			if strings.HasPrefix(m.name, row.Map) {
				compareRow(t, s.at(periodOf(row.RateHz), []mapped{m})[0], row.Map, row.Metrics)
			}
		}
	}
	if rows != 5*7 {
		t.Errorf("%d rows", rows)
	}
}

// compareRow holds the figures of one row of the script against a point.
func compareRow(t *testing.T, p *ratePoint, name string, got map[string]json.RawMessage) {
	t.Helper()
	col := p.c.Sampled
	series := got["tracking_series"]
	want := map[string]Figure{
		"position_constant": col.PositionConstant, "velocity_constant": col.VelocityConstant, "acceleration_constant": col.AccelerationConstant,
		"step_error": col.Steady[0].WorstError, "ramp_error": col.Steady[1].WorstError, "parabola_error": col.Steady[2].WorstError, "ripple": col.Steady[2].Ripple,
		"phase_margin": col.PhaseMarginDeg, "gain_margin": col.GainMarginDB, "modulus_margin": col.ModulusMargin, "delay_margin": col.DelayMarginS,
		"jitter_margin": col.JitterMarginS, "crossover": col.CrossoverRadS, "bandwidth": col.BandwidthRadS,
	}
	if string(got["stable"]) != map[bool]string{true: "true", false: "false"}[col.Stable] {
		t.Errorf("%g Hz, %s: stable is %v, the script has %s", p.hz, name, col.Stable, got["stable"])
	}
	if !col.Stable { // no figure of an unstable loop is compared but its constants
		for metric := range want {
			if !strings.HasSuffix(metric, "_constant") {
				delete(want, metric)
			}
		}
	}
	var c [4]float64
	if err := json.Unmarshal(series, &c); err != nil {
		t.Errorf("%g Hz, %s: tracking series %s", p.hz, name, series)
	}
	for k, v := range col.TrackingSeries {
		if col.Stable && !(math.Abs(c[k]-v.Value) <= 1e-6*math.Max(math.Abs(v.Value), math.Pow(0.04, float64(k)))) { // in time constants of 0.04 s
			t.Errorf("%g Hz, %s: c%d is %.9g, the script has %.9g", p.hz, name, k, v.Value, c[k])
		}
	}
	for metric, f := range want {
		text := string(got[metric])
		var v float64
		switch {
		case text == `"inf"`:
			v = math.Inf(1)
		default:
			if err := json.Unmarshal(got[metric], &v); err != nil {
				t.Errorf("%g Hz, %s: %s is %q in the script", p.hz, name, metric, text)
				continue
			}
		}
		tol := 1e-6
		if metric == "ripple" {
			tol = 2e-5
		}
		if same := f.Value == v || math.Abs(f.Value-v) <= tol*math.Abs(f.Value); !f.OK || !same {
			t.Errorf("%g Hz, %s: %s is %.9g, the script has %.9g (apart %.2g)", p.hz, name, metric, f.Value, v, (f.Value-v)/f.Value)
		}
	}
}
