package study

import (
	"fmt"
	"math"
	"strings"
)

// explain says why no rate works: which constraints no rate meets, which exclude each other, and how far each must give way
// for a window to open.
func (j *rateJob) explain() error {
	if len(j.window) > 0 {
		return nil
	}
	k := &Conflict{Impossible: []string{}, Sets: [][]string{}, Relaxations: []Relaxation{}, Text: []string{}}
	var possible []int
	for i, c := range j.list {
		switch {
		case !j.judges(c):
		case len(j.spans[i]) == 0:
			k.Impossible = append(k.Impossible, c.text)
			k.Text = append(k.Text, fmt.Sprintf("No rate meets %q by itself: %s.", c.text, j.r.Windows[i].Note))
		default:
			possible = append(possible, i)
		}
	}
	for _, set := range j.exclusive(possible) {
		k.Sets = append(k.Sets, j.texts(set))
		k.Text = append(k.Text, j.exclusionText(set))
	}
	for i, c := range j.list {
		if c.name == "stable" || c.name == "runs" || !j.judges(c) {
			continue
		}
		q, err := j.relax(i)
		if err != nil {
			return err
		}
		if q != nil {
			k.Relaxations = append(k.Relaxations, *q)
			if q.Enough.OK {
				k.Text = append(k.Text, fmt.Sprintf("With %s %s %s in place of %q a window opens about %s.",
					c.name, c.op, withUnit(q.Enough, c.unit), c.text, hertzText(q.RateHz.Value)))
			}
		}
	}
	if err := j.together(k); err != nil {
		return err
	}
	j.r.Conflict = k
	return nil
}

func (j *rateJob) texts(set []int) []string {
	out := make([]string, len(set))
	for n, i := range set {
		out[n] = j.list[i].text
	}
	return out
}

// exclusionText says where the members of a set are met.
func (j *rateJob) exclusionText(set []int) string {
	parts := make([]string, len(set))
	for n, i := range set {
		parts[n] = fmt.Sprintf("%q is met %s", j.list[i].text, spansText(j.spans[i]))
	}
	return strings.Join(parts, ", ") + ": no rate meets them together."
}

// spansText words a list of intervals: "from 2 kHz to 5 kHz", "up to 300 Hz".
func spansText(list []rateSpan) string {
	parts := make([]string, 0, len(list))
	for n, s := range list {
		if n == 3 {
			parts = append(parts, fmt.Sprintf("and %d more intervals", len(list)-n))
			break
		}
		switch {
		case s.low <= 0 && math.IsInf(s.high, 1):
			parts = append(parts, "at every rate")
		case s.low <= 0:
			parts = append(parts, "up to "+hertzText(s.high))
		case math.IsInf(s.high, 1):
			parts = append(parts, "from "+hertzText(s.low)+" on")
		default:
			parts = append(parts, "from "+hertzText(s.low)+" to "+hertzText(s.high))
		}
	}
	return strings.Join(parts, ", ")
}

// mostSets bounds the sets that are listed.
const mostSets = 10

// exclusive lists the smallest sets of constraints, each of which some rate meets, that no rate meets together: pairs first, then
// triples and so on, leaving out sets that hold a smaller one.
func (j *rateJob) exclusive(possible []int) [][]int {
	var out [][]int
	holds := func(set []int) bool {
		for _, small := range out {
			n := 0
			for _, x := range small {
				for _, y := range set {
					if x == y {
						n++
					}
				}
			}
			if n == len(small) {
				return true
			}
		}
		return false
	}
	type partial struct {
		set    []int
		window []rateSpan
	}
	level := []partial{{nil, []rateSpan{{0, math.Inf(1)}}}}
	for size := 1; size <= len(possible) && size <= 5 && len(out) < mostSets; size++ {
		var next []partial
		for _, p := range level {
			for _, i := range possible {
				if len(p.set) > 0 && i <= p.set[len(p.set)-1] {
					continue
				}
				set := append(append([]int{}, p.set...), i)
				w := meet(p.window, j.spans[i])
				switch {
				case holds(set):
				case len(w) == 0 && len(out) < mostSets:
					out = append(out, set)
				case len(w) > 0 && len(next) < 5000:
					next = append(next, partial{set, w})
				}
			}
		}
		level = next
	}
	return out
}

// relax finds the limit of one constraint at which a window opens, the others as they are; nil where the constraint is met everywhere
// that the others are.
func (j *rateJob) relax(i int) (*Relaxation, error) {
	c := j.list[i]
	rest := []rateSpan{{0, math.Inf(1)}}
	for k := range j.list {
		if k != i && j.judges(j.list[k]) {
			rest = meet(rest, j.spans[k])
		}
	}
	q := &Relaxation{Requirement: c.text, Limit: Fig(c.limit), Unit: c.unit}
	if len(rest) == 0 {
		return q, nil
	}
	best, hz, err := j.best(c, rest)
	if err != nil || !best.OK {
		return q, err
	}
	q.Enough, q.RateHz = Fig(outward(best.Value, c.op)), hz
	return q, nil
}

// outward rounds a figure to four digits away from the side that it must stay on, so that the rounded limit is met.
func outward(v float64, op string) float64 {
	if v == 0 || math.IsInf(v, 0) {
		return v
	}
	unit := math.Pow(10, math.Floor(math.Log10(math.Abs(v)))-3)
	r := math.Floor(v/unit) * unit
	if op[0] == '<' {
		r = math.Ceil(v/unit) * unit
	}
	if !meets(v, op, r) { // a strict comparison, or the product rounded the wrong way
		r += unit * map[bool]float64{true: 1, false: -1}[op[0] == '<']
	}
	return r
}

// together finds, where giving way on one constraint alone is not enough, the stable rate at which the violations, as parts of the limits, add up to least,
// and says what every constraint would have to allow there.
func (j *rateJob) together(k *Conflict) error {
	for _, q := range k.Relaxations {
		if q.Enough.OK {
			return nil
		}
	}
	var at *ratePoint
	least := math.Inf(1)
	for _, p := range j.scan.points {
		if !p.stable() {
			continue
		}
		sum, known := 0.0, true
		for _, c := range j.failures(p) {
			s := c.slack(p)
			known = known && !math.IsNaN(s) && !math.IsInf(s, 0)
			sum -= s / math.Max(math.Abs(c.limit), 1e-300)
		}
		if known && sum < least {
			least, at = sum, p
		}
	}
	if at == nil {
		return nil
	}
	if err := j.sweep.simulate(j.ctx, at, wanted(j.list)); err != nil {
		return err
	}
	var parts []string
	for _, c := range j.failures(at) {
		if c.figure == nil {
			continue
		}
		if f, _ := c.figure(at); f.OK {
			parts = append(parts, fmt.Sprintf("%s %s %s", c.name, c.op, withUnit(Fig(outward(f.Value, c.op)), c.unit)))
		}
	}
	if len(parts) > 0 {
		k.Text = append(k.Text, fmt.Sprintf("Giving way on one requirement alone opens no window. The least that all of them together must give is about %s: %s.",
			hertzText(at.hz), strings.Join(parts, ", ")))
	}
	return nil
}
