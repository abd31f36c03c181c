package sim

import (
	"context"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

// inC builds testdata/speed/tick.c and returns what runs it: nanoseconds a tick, final y, rms and peak.
func inC(t testing.TB) func(ticks int64) (ns, y, rms, peak float64) {
	t.Helper()
	cc, err := exec.LookPath("cc")
	if err != nil {
		if os.Getenv("STEADYTICK_CHECK") == "1" {
			t.Fatal("no C compiler")
		}
		t.Skip("no C compiler")
	}
	bin := filepath.Join(t.TempDir(), "tick")
	if out, err := exec.Command(cc, "-O2", "-std=c99", "-Wall", "-Wextra", "-o", bin, "../testdata/speed/tick.c", "-lm").CombinedOutput(); err != nil || len(out) > 0 {
		t.Fatalf("%v\n%s", err, out)
	}
	return func(ticks int64) (ns, y, rms, peak float64) {
		out, err := exec.Command(bin, fmt.Sprint(ticks)).Output()
		if err != nil {
			t.Fatal(err)
		}
		var v [4]float64
		for i, s := range strings.Fields(string(out)) {
			if v[i], err = strconv.ParseFloat(s, 64); err != nil {
				t.Fatal(err)
			}
		}
		return v[0], v[1], v[2], v[3]
	}
}

// byHand is the loop of tick.c.
func byHand(t testing.TB, ticks int64) Config {
	cfg := stableSix(t)
	cfg.Tasks[0].Limits = Limits{On: true, Low: -24, High: 24}
	cfg.PointsPerTick, cfg.Ticks = 1, ticks
	return cfg
}

// The loop written by hand in C gives the same output, peak and rms. It sums without compensation and has its
// exponentials from a series in double: 2000 ticks of roundings of 1e-16 of signals of one.
func TestTickInC(t *testing.T) {
	_, y, rms, peak := inC(t)(2000)
	tr := run(t, byHand(t, 2000))
	near(t, "y", tr.FinalY, y, 1e-12)
	near(t, "rms", tr.RMSError, rms, 1e-12)
	near(t, "peak", tr.PeakError, peak, 0)
	if math.Abs(y-1) < 1e-9 || peak != 1 {
		t.Errorf("y %v and peak %v tell nothing", y, peak)
	}
}

// BenchmarkHandWrittenC reports the time of a tick as a multiple of that of the same loop in C, compiled with -O2, in turn
// with it; the least of five each. The aim is 1.5.
func BenchmarkHandWrittenC(b *testing.B) {
	c := inC(b)
	for b.Loop() {
		const ticks = 10_000_000
		least, leastC := math.Inf(1), math.Inf(1)
		for range 5 {
			ns, _, _, _ := c(ticks)
			leastC = math.Min(leastC, ns)
			start := time.Now()
			if _, err := Run(context.Background(), byHand(b, ticks)); err != nil {
				b.Fatal(err)
			}
			least = math.Min(least, float64(time.Since(start).Nanoseconds())/ticks)
		}
		b.ReportMetric(least, "ns/tick")
		b.ReportMetric(leastC, "ns/tick-in-C")
		b.ReportMetric(least/leastC, "times-C")
	}
}
