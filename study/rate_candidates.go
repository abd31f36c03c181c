package study

import (
	"math"
	"slices"

	"steadytick/loop"
)

// mostRound bounds the round rates in the table of candidates.
const mostRound = 12

// candidates analyses rates that a reader may want to compare: the pick, the file's rate, the slowest of the window, timer settings beside the
// pick and round rates over the range, each with every figure that the file has the data for.
func (j *rateJob) candidates() error {
	type candidate struct {
		hz  float64
		why string
	}
	var list []candidate
	add := func(hz float64, why string) {
		for _, x := range list {
			if math.Abs(x.hz-hz) <= toldApart*hz {
				return
			}
		}
		if hz > 0 && !math.IsInf(hz, 0) {
			list = append(list, candidate{hz, why})
		}
	}
	if p := j.r.Pick; p != nil {
		add(p.RateHz, "chosen")
	}
	add(j.r.FileRateHz, "file")
	if p := j.r.Pick; p != nil {
		if p.SlowestHz.OK {
			add(p.SlowestHz.Value, "slowest")
		}
		if p.FastestHz.OK {
			add(p.FastestHz.Value, "fastest")
		}
		for _, s := range p.Settings {
			add(s.RateHz, "timer")
		}
	}
	for _, f := range roundRates(j.lo, j.hi) {
		add(f, "round")
	}
	slices.SortFunc(list, func(a, b candidate) int { return compareFloat(a.hz, b.hz) })
	maps := []*rateScan{j.scan}
	if j.o.AllMaps {
		maps = append(maps, j.others...)
	}
	rows := make([]Candidate, len(list)*len(maps))
	step := j.progress("candidates", len(rows))
	var count counter
	err := parallel(len(rows), func(i int) error {
		c, scan := list[i/len(maps)], maps[i%len(maps)]
		row, err := j.candidate(scan, c.hz)
		row.Why = c.why
		rows[i] = row
		step(count.next())
		return err
	})
	j.r.Candidates = rows
	return err
}

// roundRates are 1, 2 and 5 times powers of ten between lo and hi, every second or third of them where there are more than mostRound.
func roundRates(lo, hi float64) []float64 {
	var out []float64
	for _, steps := range [][]float64{{1, 2, 5}, {1, 3}, {1}} {
		out = out[:0]
		for e := math.Floor(math.Log10(lo)); e <= math.Log10(hi); e++ {
			for _, m := range steps {
				if f := m * math.Pow(10, e); f >= lo && f <= hi {
					out = append(out, f)
				}
			}
		}
		if len(out) <= mostRound {
			break
		}
	}
	return out
}

// candidate is one row.
func (j *rateJob) candidate(scan *rateScan, hz float64) (Candidate, error) {
	row := Candidate{RateHz: hz, Map: scan.m.name, Metrics: map[string]Figure{}, Fails: []string{}}
	every := simulated{step: true}
	for _, in := range j.l.Inputs {
		if in.Kind == "move" || in.Kind == "file" {
			every.tracking = true
		}
	}
	p, err := scan.whole(hz, every)
	if err != nil {
		return row, err
	}
	for _, c := range j.list {
		if j.judges(c) && !met(c.slack(p)) {
			row.Fails = append(row.Fails, c.text)
		}
	}
	row.Meets = len(row.Fails) == 0
	if !p.runs() {
		return row, nil
	}
	for _, m := range loop.Metrics() {
		if !judged(m.Name) || m.Inputs != nil && !hasInput(j.l, m.Inputs) {
			continue
		}
		if f, why := metric(p.loop, p.c, m.Name); f.OK && (why == "" || f.Value != 0) {
			row.Metrics[m.Name] = f
		}
	}
	return row, nil
}

// whole is the loop at a rate with every figure; those of runs only where they are of ordinary length.
func (w *rateScan) whole(hz float64, every simulated) (*ratePoint, error) {
	if err := w.ctx.Err(); err != nil {
		return nil, err
	}
	full := *w.s
	full.quick = false
	p := full.at(periodOf(hz), []mapped{w.m})[0]
	soon, err := full.settlesSoon(p)
	if err == nil && soon {
		err = full.simulate(w.ctx, p, every)
	}
	return p, err
}

func hasInput(l *loop.Loop, kinds []string) bool {
	for _, in := range l.Inputs {
		if slices.Contains(kinds, in.Kind) {
			return true
		}
	}
	return false
}
