package study

import (
	"math"
	"math/cmplx"
	"slices"
	"sort"
)

// frequencyGrid spans the frequencies that matter: from a decade below the slowest
// pole or crossing to a decade above the fastest, at most to half the sample rate for the
// sampled loop; denser about the poles, so that no resonance is cut.
func frequencyGrid(list []*analyzed, points int) []float64 {
	low, high := math.Inf(1), 0.0
	var marks []float64
	note := func(w float64) {
		if w > 0 && !math.IsInf(w, 0) {
			low, high = math.Min(low, w), math.Max(high, w)
			marks = append(marks, w)
		}
	}
	for _, a := range list {
		for _, p := range a.poles.Equivalent {
			note(cmplx.Abs(p))
			if math.Abs(imag(p)) > 0 {
				note(math.Abs(imag(p)))
			}
		}
		for _, g := range a.margins.GainCrossings {
			note(g.W)
		}
		if a.block.period != nil {
			note(math.Pi / a.seconds())
		}
	}
	if high == 0 {
		low, high = 0.1, 10
	}
	low, high = math.Max(low/30, high*1e-9), high*3
	for _, a := range list {
		if a.block.period != nil {
			high = math.Min(high, beyondHalf*math.Pi/a.seconds())
		}
	}
	low = math.Min(low, high/10)
	grid := make([]float64, 0, points+9*len(marks))
	ratio := math.Log(high / low)
	for i := range points {
		grid = append(grid, low*math.Exp(ratio*float64(i)/float64(points-1)))
	}
	for _, m := range marks {
		for k := -4; k <= 4; k++ {
			if w := m * (1 + 0.005*float64(k)); w >= low && w <= high {
				grid = append(grid, w)
			}
		}
	}
	sort.Float64s(grid)
	// A pole and its conjugate give the same marks: points that are one to the eye, but no bracket about a maximum.
	return slices.CompactFunc(grid, func(a, b float64) bool { return math.Abs(a-b) <= 1e-9*a })
}

const (
	lowestDB = -120 // below it there is nothing to see
	// mostTurn is how far a delay may turn the phase between two points, rad; beyond it the phase cannot be followed.
	mostTurn = 2
	// beyondHalf is how far the continuous loop is drawn beyond half the sample rate.
	beyondHalf = 5
)

// addFrequency fills gain and phase of L for the columns. The phase is unwrapped from
// the low end; points where the gain is zero or not finite are left out.
func (v *Curves) addFrequency(list []*analyzed) {
	grid := frequencyGrid(list, 400)
	for _, a := range list {
		gain := Curve{Name: a.name()}
		phase := Curve{Name: a.name()}
		half := math.Inf(1)
		if a.block.period != nil {
			half = math.Pi / a.seconds()
			v.NyquistRadS = half
		}
		response, err := a.block.open.Scan()
		if err != nil {
			continue // Analyze has been through the same preparation
		}
		last, turns := math.NaN(), 0.0
		for _, w := range grid {
			if w > half {
				break
			}
			l := response.At(w)
			db, ph := 20*math.Log10(cmplx.Abs(l)), cmplx.Phase(l)*180/math.Pi
			if math.IsNaN(db) || math.IsInf(db, 0) || db < lowestDB {
				continue
			}
			if len(gain.X) > 0 && (w-gain.X[len(gain.X)-1])*a.delay > mostTurn {
				break
			}
			if math.IsNaN(last) && ph > 0 {
				turns = -360 // lag is the usual case: start in (−360, 0]
			}
			ph += turns
			for !math.IsNaN(last) && ph-last > 180 {
				ph, turns = ph-360, turns-360
			}
			for !math.IsNaN(last) && ph-last < -180 {
				ph, turns = ph+360, turns+360
			}
			last = ph
			gain.X, gain.Y = append(gain.X, w), append(gain.Y, db)
			phase.X, phase.Y = append(phase.X, w), append(phase.Y, ph)
		}
		v.GainDB, v.PhaseDeg = append(v.GainDB, gain), append(v.PhaseDeg, phase)
	}
}

// shownPoles is how many times farther than the crossover, or the nearest poles, a pole may lie to be
// drawn: beyond it the ones that matter would shrink to a point. The table has them all.
const shownPoles = 10

// farPole is the largest magnitude of a pole that is drawn.
func farPole(list []*analyzed) float64 {
	near := 0.0
	for _, a := range list {
		if a.margins.HasCrossover {
			for _, g := range a.margins.GainCrossings {
				near = math.Max(near, g.W)
			}
		}
		for i, p := range a.poles.Equivalent {
			if i < 2 && !cmplx.IsInf(p) {
				near = math.Max(near, cmplx.Abs(p))
			}
		}
	}
	return shownPoles * near
}

// addPoles fills the closed-loop poles as equivalent poles, continuous and sampled, as far as they are drawn.
func (v *Curves) addPoles(list []*analyzed) {
	far := farPole(list)
	for _, a := range list {
		c := Curve{Name: a.name(), Dots: true}
		for _, p := range a.poles.Equivalent {
			if !cmplx.IsNaN(p) && !cmplx.IsInf(p) && cmplx.Abs(p) <= far {
				c.X, c.Y = append(c.X, real(p)), append(c.Y, imag(p))
			}
		}
		v.Poles = append(v.Poles, c)
	}
}
