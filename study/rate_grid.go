package study

import (
	"math"
	"math/big"
	"slices"

	"steadytick/loop"
)

const (
	// perDecade is how many rates are looked at in a decade to begin with: neighbours lie 3.9 % apart.
	perDecade = 60
	// fewestRates and mostRates bound them.
	fewestRates, mostRates = 120, 900
	// mostFolds: the rates at which a mode of the plant turns by k half turns in a tick are looked at more closely up to this k.
	// Slower than a 32nd of twice the mode's frequency, islands may be narrower than the rates looked at.
	mostFolds = 32
	// swinging modes have a damping ratio below this: a faster one is gone within a turn and leaves no island.
	swinging = 0.2
)

// rateGrid is ascending rates in Hz from lo to hi, even in logarithm, n of them (0: by perDecade), with more of them about the
// rates near which a mode of the plant hides from the samples,
//
//	f = ω/(π·k),   k = 1, 2, …   (T = kπ/ω)
//
// and the rates to be looked at in any case.
func (s *sweeper) rateGrid(lo, hi float64, n int, always ...float64) []float64 {
	if n == 0 {
		n = int(math.Min(mostRates, math.Max(fewestRates, perDecade*math.Log10(hi/lo))))
	}
	grid := make([]float64, 0, n)
	for i := range n {
		grid = append(grid, lo*math.Pow(hi/lo, float64(i)/float64(n-1)))
	}
	grid[0], grid[n-1] = lo, hi
	for _, w := range s.swinging() {
		for k := 1; k <= mostFolds; k++ {
			f := w / (math.Pi * float64(k))
			for j := 3.0; j <= 13; j++ {
				if d := math.Exp2(-j); k <= 8 || j == 5 || j == 7 || j == 9 {
					grid = append(grid, f*(1-d), f*(1+d))
				}
			}
		}
	}
	grid = append(grid, always...)
	slices.Sort(grid)
	out := grid[:0]
	for _, f := range grid {
		if f >= lo && f <= hi && (len(out) == 0 || f > out[len(out)-1]*(1+1e-9)) {
			out = append(out, f)
		}
	}
	return out
}

// swinging lists the frequencies of the plant's lightly damped modes, rad/s.
func (s *sweeper) swinging() []float64 {
	poles, err := s.own.Plant.Ratio.Poles()
	if err != nil {
		return nil
	}
	var out []float64
	for _, p := range poles {
		if p.Im.Sign() > 0 && math.Abs(p.Re.Float64()) < swinging*p.Abs() {
			out = append(out, p.Im.Float64())
		}
	}
	return out
}

// periodOf is the exact period of a rate in Hz.
func periodOf(hz float64) *big.Rat {
	r := new(big.Rat).SetFloat64(hz)
	return r.Inv(r)
}

// shortPeriodOf is the period of a rate within 2^-25 of hz, written with few digits: exact arithmetic goes faster on it.
func shortPeriodOf(hz float64) *big.Rat {
	m, e := math.Frexp(hz)
	return periodOf(math.Ldexp(math.Round(math.Ldexp(m, 24)), e-24))
}

// beyond: the search goes on 20 % past what the processor allows, so that this bound is found like any other.
const beyond = 1.2

// limits of a rate that the loop file accepts too, Hz.
const slowestRate, fastestRate = 1e-6, 1e9

// searchRange is the range of rates to look at, Hz, and what it was made from. Ends that the file or the options give
// stand. The others come from the loop's own dynamics below, and from them and the processor above:
//
//	from   a fifth of the crossover in Hz, at most half the file's rate
//	to     1000 times the crossover in Hz, and 10 times the file's rate; with a budget, a little beyond its bound, at least 100 times
//	       the crossover, so that what it excludes can be told; never far beyond where conversion and compute fill the tick
func searchRange(l *loop.Loop, cont *analyzed, o RateOptions) (lo, hi float64, note string) {
	own := 1 / seconds(l.Timing.Period)
	w, what := dynamics(cont)/(2*math.Pi), "crossover"
	if w == 0 {
		w, what = own/20, "a twentieth of the file's rate"
	}
	lo, hi = math.Min(w/5, own/2), math.Max(1000*w, 10*own)
	low, high := "a fifth of the "+what, "1000 times the "+what
	if budget := budgetRate(l); budget > 0 {
		hi, high = math.Max(beyond*budget, math.Max(100*w, 2*own)), "100 times the "+what
		if hi == beyond*budget {
			high = "a little beyond the processor's budget"
		}
	}
	if work := workOf(l); work > 0 && beyond/work < hi {
		hi, high = beyond/work, "a little beyond where conversion and compute fill the tick"
	}
	for _, end := range []struct {
		hz   *big.Rat
		to   *float64
		word *string
		by   string
	}{
		{searchOf(l).From, &lo, &low, "the file"}, {searchOf(l).To, &hi, &high, "the file"},
		{o.From, &lo, &low, "the request"}, {o.To, &hi, &high, "the request"},
	} {
		if end.hz != nil {
			*end.to, *end.word = hertz(end.hz), end.by
		}
	}
	lo, hi = math.Max(lo, slowestRate), math.Min(hi, fastestRate)
	if lo >= hi && high != "the file" && high != "the request" {
		hi = math.Min(10*lo, fastestRate)
	} else if lo >= hi {
		lo = hi / 10
	}
	return lo, hi, "from " + hertzText(lo) + " (" + low + ") to " + hertzText(hi) + " (" + high + ")"
}

// searchOf is the range that the file gives.
func searchOf(l *loop.Loop) loop.RateRange {
	if l.Search == nil {
		return loop.RateRange{}
	}
	return *l.Search
}

// workOf is conversion and compute together, seconds.
func workOf(l *loop.Loop) float64 {
	return seconds(new(big.Rat).Add(l.Timing.Conversion, l.Timing.Compute))
}

// budgetRate is the rate at which the processor's budget is used up, Hz; 0 where there is none.
func budgetRate(l *loop.Loop) float64 {
	cost := costOf(l)
	if l.Processor == nil || cost.Sign() <= 0 {
		return 0
	}
	return hertz(new(big.Rat).Quo(l.Processor.Budget, cost))
}

func seconds(T *big.Rat) float64 { x, _ := T.Float64(); return x }
func hertz(f *big.Rat) float64   { x, _ := f.Float64(); return x }

// dynamics is the frequency about which the loop lives, rad/s: crossover, else bandwidth, else its slowest mode; 0 for none.
func dynamics(cont *analyzed) float64 {
	if cont == nil {
		return 0
	}
	if cont.margins.HasCrossover {
		return cont.margins.Crossover
	}
	if cont.stable {
		if b := cont.bandwidth(); b.OK && b.Value > 0 && !math.IsInf(b.Value, 0) {
			return b.Value
		}
	}
	if slow := cont.slowest(); slow > 0 {
		return 1 / slow
	}
	return 0
}
