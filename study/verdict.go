package study

import (
	"fmt"
	"math"
	"strings"
)

// verdict is one sentence (two where requirements fail) that says what sampling
// does to the loop and names the largest cause.
func verdict(c *Compare) string {
	s, cont := c.Sampled, c.Continuous
	rate := "Sampled at " + hertzText(1/c.PeriodS)
	var text string
	switch {
	case !s.Stable && cont != nil && !cont.Stable:
		text = rate + " the loop is unstable, and so is the continuous loop: mend the design before the sample rate."
	case !s.Stable:
		text = rate + " the loop is unstable" + tooSlow(c, cont, ": ") + "."
	case cont != nil && !cont.Stable:
		text = rate + " the loop is stable, though the continuous loop is not."
	default:
		text = rate + " the loop is stable" + marginChange(c, cont) + "."
	}
	if e := errorChange(c); s.Stable && e != "" {
		text += " " + e
	}
	return text + failed(c.Requirements)
}

// number is a figure in a sentence: four digits.
func number(v float64) string { return fmt.Sprintf("%.4g", v) }

// marginChange tells how the phase margin changes and why.
func marginChange(c *Compare, cont *Column) string {
	s := c.Sampled.PhaseMarginDeg
	if !s.OK || math.IsInf(s.Value, 0) {
		return ""
	}
	if cont == nil || !cont.PhaseMarginDeg.OK || math.IsInf(cont.PhaseMarginDeg.Value, 0) {
		return fmt.Sprintf(" with %s° of phase margin", number(s.Value))
	}
	was := cont.PhaseMarginDeg.Value
	if number(s.Value) == number(was) {
		return fmt.Sprintf("; the phase margin stays at %s°", number(was))
	}
	if s.Value > was {
		return fmt.Sprintf("; the phase margin is %s°, against %s° of the continuous loop", number(s.Value), number(was))
	}
	return fmt.Sprintf("; the phase margin falls from %s° to %s°", number(was), number(s.Value)) + culprit(c, nil, ": ")
}

// addedLag is the lag that sampling brought into the loop, by the delay ledger, taken where the phase
// margin is smallest, which a resonance can put elsewhere than at crossover.
type addedLag struct {
	worst LedgerItem // the largest entry, its degrees taken there; Item "" when none adds lag
	total float64    // degrees, of the entries that add lag
	at    string     // where, in words
}

// lagOf adds up the entries of the ledger that sampling brought in, where the phase margin is smallest.
func lagOf(c *Compare) addedLag {
	return lagAt(c, criticalRadS(c.Sampled), "where the margin is smallest")
}

// lagAt adds them up at w rad/s, or at crossover for 0; why says in words what is there. Away from crossover pure
// delays grow with frequency, and the map, whose phase is no delay, is left out.
func lagAt(c *Compare, w float64, why string) addedLag {
	a := addedLag{at: "crossover"}
	scale := 1.0
	if w > 0 && c.Sampled.CrossoverRadS.Value != w {
		a.at, scale = fmt.Sprintf("%s rad/s, %s", number(w), why), w/c.Sampled.CrossoverRadS.Value
	}
	for _, i := range c.DelayLedger {
		if i.Item == itemDeadTime || i.Item == itemSensor || !i.Degrees.OK || scale != 1 && i.Item == itemMap {
			continue
		}
		i.Degrees.Value *= scale
		a.total += math.Max(0, i.Degrees.Value)
		if i.Degrees.Value > a.worst.Degrees.Value {
			a.worst = i
		}
	}
	return a
}

// culprit names the largest entry of the delay ledger that sampling brought in.
func culprit(c *Compare, cont *Column, join string) string {
	lag := lagOf(c)
	adds := fmt.Sprintf("sampling adds %s° of lag at %s, the largest part by the %s (%s°)",
		number(lag.total), lag.at, lag.worst.Item, number(lag.worst.Degrees.Value))
	switch {
	case lag.total <= 0:
		return ""
	case cont != nil && cont.PhaseMarginDeg.OK && !math.IsInf(cont.PhaseMarginDeg.Value, 0):
		return join + fmt.Sprintf("the continuous loop has %s° of phase margin, ", number(cont.PhaseMarginDeg.Value)) + adds
	}
	return join + adds
}

// tooSlow is culprit, or that the continuous loop crosses over where the samples see nothing.
func tooSlow(c *Compare, cont *Column, join string) string {
	half := math.Pi / c.PeriodS
	if cont != nil && cont.CrossoverRadS.OK && cont.CrossoverRadS.Value >= half {
		return join + fmt.Sprintf("the continuous loop crosses over at %s rad/s, above half the sample rate (%s rad/s)",
			number(cont.CrossoverRadS.Value), number(half))
	}
	return culprit(c, cont, join)
}

// criticalRadS is the gain crossing that gives the phase margin, 0 when there is none.
func criticalRadS(c *Column) float64 {
	for _, g := range c.GainCrossings {
		if g.MarginDeg == c.PhaseMarginDeg {
			return g.RadS
		}
	}
	return 0
}

// errorChange compares the steady error of the first input that has one in both columns.
func errorChange(c *Compare) string {
	for i, s := range c.Sampled.Steady {
		if !s.WorstError.OK || s.WorstError.Value == 0 || s.Input == "load_step" {
			continue
		}
		now := s.WorstError.Value
		what := "tracking error for the " + InputLabel(s, c.Units)
		if math.IsInf(now, 0) {
			continue
		}
		if c.Continuous == nil || !c.Continuous.Steady[i].WorstError.OK {
			return fmt.Sprintf("The %s is %s %s.", what, number(now), c.Units.Output)
		}
		was := c.Continuous.Steady[i].WorstError.Value
		if math.Abs(now-was) <= 1e-3*math.Abs(was) {
			return fmt.Sprintf("The %s stays at %s %s.", what, number(now), c.Units.Output)
		}
		return fmt.Sprintf("The %s goes from %s to %s %s, between the ticks included.", what, number(was), number(now), c.Units.Output)
	}
	return ""
}

// failed lists the requirements that are not met.
func failed(list []Requirement) string {
	var names []string
	for _, r := range list {
		if r.Met != nil && !*r.Met {
			names = append(names, r.Name)
		}
	}
	switch {
	case len(names) > 0:
		return " Not met: " + strings.Join(names, ", ") + "."
	case len(list) > 0:
		for _, r := range list {
			if r.Met == nil {
				return ""
			}
		}
		return " All requirements are met."
	}
	return ""
}
