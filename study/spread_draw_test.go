package study

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"

	"steadytick/loop"
)

// Wilson's interval against R. G. Newcombe, "Two-sided confidence intervals for the single proportion", Statistics in Medicine 17, 1998,
// table I, method 3 (from memory, recomputed), printed to four digits.
func TestWilsonAgainstNewcombe(t *testing.T) {
	for _, c := range []struct {
		k, n      int64
		low, high float64
	}{{81, 263, 0.2553, 0.3662}, {15, 148, 0.0624, 0.1605}, {0, 20, 0, 0.1611}, {1, 29, 0.0061, 0.1718}, {20, 20, 1 - 0.1611, 1}} {
		got := wilson(c.k, c.n)
		if !(math.Abs(got[0].Value/100-c.low) <= 0.5e-4) || !(math.Abs(got[1].Value/100-c.high) <= 0.5e-4) {
			t.Errorf("%d of %d: %v, want %g to %g", c.k, c.n, got, c.low, c.high)
		}
	}
	if wilson(0, 20)[0].Value != 0 || wilson(20, 20)[1].Value != 100 || wilson(0, 0)[0].OK {
		t.Error("the ends are not exact")
	}
}

// drawJob is a job for the draws of n symbols.
func drawJob(draw string, seed uint64, n int) *spreadJob {
	return &spreadJob{o: SpreadOptions{Draw: draw, Seed: seed}, symbols: make([]loop.Symbol, n)}
}

// The grades of neighbouring trials, seeds and symbols are uniform and have nothing to do with each other: the largest distance of their
// distribution from the diagonal stays below 2/√n (Kolmogorov: passed by chance in one of 1500 runs; from memory), correlations below 5/√n.
func TestGradesAreUniformAndIndependent(t *testing.T) {
	const n = 10_000
	draws := map[string][]float64{}
	for k := range int64(n) {
		a, b := drawJob(DrawUniform, 1, 3).grades(k+1), drawJob(DrawUniform, 2, 3).grades(k+1)
		next := drawJob(DrawUniform, 1, 3).grades(k + 2)
		across := drawJob(DrawUniform, uint64(k), 3).grades(1)
		draws["first"] = append(draws["first"], a[0])
		draws["third"] = append(draws["third"], a[2])
		draws["next trial"] = append(draws["next trial"], next[0])
		draws["next seed"] = append(draws["next seed"], b[0])
		draws["across seeds"] = append(draws["across seeds"], across[0])
	}
	for name, list := range draws {
		sorted := slices.Sorted(slices.Values(list))
		for i, g := range sorted {
			if d := math.Abs(g - (float64(i)+0.5)/n); !(d <= 2/math.Sqrt(n)) || g < 0 || g >= 1 {
				t.Errorf("%s: %g stands at rank %d of %d", name, g, i, n)
				break
			}
		}
		for other, list2 := range draws {
			if other == name {
				continue
			}
			sum := 0.0
			for i := range list {
				sum += (list[i] - 0.5) * (list2[i] - 0.5) * 12 / n
			}
			if !(math.Abs(sum) <= 5/math.Sqrt(n)) {
				t.Errorf("%s and %s: correlation %g", name, other, sum)
			}
		}
	}
}

// Trials are the same for ever: parts of a study may be run by builds years apart. The figures are those of the first version.
func TestDrawsAreKept(t *testing.T) {
	got := fmt.Sprintf("%.12f %.12f", drawJob(DrawUniform, 1, 2).deltas(1), drawJob(DrawNormal, 12345678901234567890, 2).deltas(MostTrials))
	if want := keptDraws; got != want {
		t.Errorf("drawn %s, before %s", got, want)
	}
}

const keptDraws = "[-0.798836782193 -0.130126491842] [-0.421700265849 -0.404180970074]"

// The place of a grade inverts the distribution function, stays within the spread and rises.
func TestPlaceOfInverts(t *testing.T) {
	before := -1.0
	for i := range 1001 {
		g := float64(i) / 1000
		x := placeOf(DrawNormal, g)
		back := (1 + math.Erf(3*x/math.Sqrt2)/math.Erf(3/math.Sqrt2)) / 2
		// erf and its inverse are good to a few units of 1e-16; the slope of F is 1.2 at most.
		if !(math.Abs(back-g) <= 1e-14) || x < -1 || x > 1 || x < before {
			t.Errorf("grade %g: place %g, back %g", g, x, back)
		}
		before = x
		if u := placeOf(DrawUniform, g); u != 2*g-1 {
			t.Errorf("grade %g: uniform place %g", g, u)
		}
	}
	// At the ends the slope of the inverse, √(2π)/6·e^4.5·… = 38, makes 1e-14 of a rounding.
	if low, high := placeOf(DrawNormal, 0), placeOf(DrawNormal, 1); !(math.Abs(low+1) <= 1e-13) || !(math.Abs(high-1) <= 1e-13) || placeOf(DrawNormal, 0.5) != 0 {
		t.Error("the ends or the middle are off")
	}
}

func TestTwelveDigits(t *testing.T) {
	for in, want := range map[string]string{"1/3": "0.333333333333", "-2/3": "-0.666666666667", "0": "0", "123456789012345": "123456789012000", "1/1024": "0.0009765625",
		"1.000000000005000000001e-150": "1.00000000001e-150", "99999999999999": "1e14"} {
		v, _ := new(big.Rat).SetString(in)
		w, _ := new(big.Rat).SetString(want)
		if got := twelveDigits(v); got.Cmp(w) != 0 {
			t.Errorf("%s to twelve digits is %s, want %s", in, got.FloatString(20), want)
		}
	}
}

// Bins give the quantiles and ranks of values of any size and sign, against sorting, whether a reference is there or not.
func TestBinsAgainstSorting(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, reference := range []Figure{{}, Fig(0), Fig(3), Fig(-1e-5), Fig(math.Inf(1))} {
		b := newBins(reference, 1)
		var v []float64
		for i := range 3000 {
			x := math.Exp(8*rng.NormFloat64()) * math.Copysign(1, rng.Float64()-0.3)
			if i%10 == 0 {
				x = b.reference
			}
			v = append(v, x)
			b.add(x, []float64{rng.Float64()})
		}
		slices.Sort(v)
		shares := []float64{1e-9, 0.001, 0.01, 0.3, 0.31, 0.5, 0.99, 1}
		got := b.quantiles(shares, int64(len(v)), v[0], v[len(v)-1])
		for i, p := range shares {
			want := v[max(0, int(math.Ceil(p*float64(len(v))))-1)]
			if !(math.Abs(got[i].Value-want) <= math.Abs(want-b.reference)/1024*1.001+b.nearest) {
				t.Errorf("reference %v: the quantile %g is %v, sorted %g", reference, p, got[i], want)
			}
		}
		n, last := int64(0), math.Inf(-1)
		b.each(func(c bin) {
			n += c.count
			if !(c.low >= last) || !(c.high >= c.low) {
				t.Errorf("bin %+v after %g", c, last)
			}
			last = c.high
		})
		if n != int64(len(v)) {
			t.Errorf("%d of %d values are in the bins", n, len(v))
		}
	}
	// The largest and the smallest floats have a bin too.
	b := newBins(Figure{}, 0)
	for _, x := range []float64{math.MaxFloat64, -math.MaxFloat64, math.SmallestNonzeroFloat64, 0, -math.SmallestNonzeroFloat64} {
		b.add(x, nil)
	}
	if q := b.quantiles([]float64{0, 0.5, 1}, 5, -math.MaxFloat64, math.MaxFloat64); math.IsNaN(q[0].Value) || math.IsInf(q[2].Value, 0) || !(q[1].Value == 0) {
		t.Errorf("quantiles of extreme values %v", q)
	}
}

// The running mean and sum of squares where plain sums of squares fail: 1e9 + {4, 7, 13, 16} has the mean 1e9 + 10 and the variance 30.
func TestMetricTallyMoments(t *testing.T) {
	m := &metricTally{low: math.Inf(1), high: math.Inf(-1), least: math.Inf(1), most: math.Inf(-1)}
	for i, x := range []float64{4, 7, 13, 16} {
		m.add(&spreadRow{trial: int64(i + 1)}, Fig(1e9+x), nil)
	}
	m.add(&spreadRow{trial: 5}, Fig(math.Inf(1)), nil)
	m.add(&spreadRow{trial: 6}, Figure{}, nil)
	// 1e9 carries 1.2e-7 in its last digit, the sum of squares 26 times that at most.
	if !(math.Abs(m.mean-1e9-10) <= 2.4e-7) || !(math.Abs(m.squares/3-30) <= 1e-5) || m.count != 4 || m.infinite != 1 || m.without != 1 {
		t.Errorf("%+v", m)
	}
	if m.highest.trial != 5 || m.lowest.trial != 1 || m.most != 1e9+16 {
		t.Errorf("ends %+v", m)
	}
}
