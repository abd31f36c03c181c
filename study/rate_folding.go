package study

import (
	"fmt"
	"math"

	"steadytick/loop"
)

// folded is where a frequency lands among the samples taken at a rate, both in Hz:
//
//	|f − k·fs|,   k the whole number nearest to f/fs
func folded(f, rate float64) float64 { return math.Abs(f - rate*math.Round(f/rate)) }

// fold lists where each disturbance of a declared frequency lands at each candidate rate, and warns when it is inside the closed-loop
// bandwidth at the pick though it is itself above half the rate.
func (j *rateJob) fold() error {
	j.r.Folding = []Folding{}
	for _, d := range j.l.Disturbances {
		if d.Frequency == nil {
			continue
		}
		w, _ := d.Frequency.Float64()
		f := Folding{Name: disturbanceName(d), At: d.At, FrequencyHz: w / (2 * math.Pi), Lands: []Landing{}}
		for _, c := range j.r.Candidates {
			if c.Map != j.r.Map {
				continue
			}
			lands := folded(f.FrequencyHz, c.RateHz)
			inside := insideBandwidth(c, lands)
			f.Lands = append(f.Lands, Landing{c.RateHz, lands, inside})
			if c.RateHz != j.chosenHz() {
				continue
			}
			if half := c.RateHz / 2; f.FrequencyHz > half && inside {
				f.Warning = fmt.Sprintf("%s at %s lands at %s among samples at %s, inside the closed-loop bandwidth: the loop answers a vibration that is not there; choose another rate or filter before sampling",
					f.Name, hertzText(f.FrequencyHz), hertzText(lands), hertzText(c.RateHz))
				j.r.warn("folds_into_bandwidth", "%s", f.Warning)
			}
		}
		j.r.Folding = append(j.r.Folding, f)
	}
	return nil
}

func disturbanceName(d loop.Disturbance) string {
	if d.Name != "" {
		return d.Name
	}
	return "the disturbance of " + hertzText(hertz(d.Frequency)/(2*math.Pi))
}

// insideBandwidth tells whether a frequency in Hz is below the closed-loop bandwidth of a candidate, or its crossover where it has no bandwidth.
func insideBandwidth(c Candidate, hz float64) bool {
	for _, name := range []string{"bandwidth", "crossover"} {
		if b, ok := c.Metrics[name]; ok {
			return hz*2*math.Pi <= b.Value
		}
	}
	return false
}
