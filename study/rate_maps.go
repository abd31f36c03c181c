package study

import (
	"fmt"
	"math"

	"steadytick/discretize"
)

// otherMaps are the loops under every other map; of those that cannot be, a row with the reason.
func (j *rateJob) otherMaps() []mapped {
	var out []mapped
	for _, name := range discretize.Methods() {
		if name == "prewarped" {
			w := dynamics(j.cont)
			if w == 0 {
				continue
			}
			name = fmt.Sprintf("prewarped at %.6g rad/s", w)
		}
		other, problems := j.l.WithMap(name)
		if len(problems) > 0 {
			j.r.Maps = append(j.r.Maps, MapWindow{Map: name, WindowHz: []Interval{}, Windows: []RateWindow{}, Note: problems[0].Message})
			continue
		}
		if label := mapName(other); label != j.r.Map {
			out = append(out, mapped{label, other})
		}
	}
	return out
}

// compareMaps finds the window under every other map.
func (j *rateJob) compareMaps() error {
	if !j.o.AllMaps {
		return nil
	}
	own := MapWindow{Map: j.r.Map, WindowHz: j.r.WindowHz, Windows: j.r.Windows}
	own.slowest(j.window, j.list, j.spans)
	own.Against = Fig(1)
	if !own.SlowestHz.OK {
		own.Against = Figure{}
	}
	refused := j.r.Maps
	j.r.Maps = []MapWindow{own}
	for _, scan := range j.others {
		// The same work with the other map in its place, into a result of its own.
		other := &rateJob{ctx: j.ctx, l: scan.m.loop, r: &Rate{Units: j.r.Units}, o: j.o, cont: j.cont, sweep: j.sweep, list: j.list,
			unjudged: j.unjudged, lo: j.lo, hi: j.hi, scan: scan, judged: map[*constraint]bool{}}
		n := (len(scan.points) + simulatedEvery - 1) / simulatedEvery
		if err := scan.simulateGrid(j.progress("simulations, "+scan.m.name, n)); err != nil {
			return err
		}
		if err := other.windows(); err != nil {
			return err
		}
		m := MapWindow{Map: scan.m.name, WindowHz: other.r.WindowHz, Windows: other.r.Windows}
		m.slowest(other.window, j.list, other.spans)
		if m.SlowestHz.OK && own.SlowestHz.OK {
			m.Against = Fig(m.SlowestHz.Value / own.SlowestHz.Value)
		}
		j.r.Maps = append(j.r.Maps, m)
	}
	j.r.Maps = append(j.r.Maps, refused...)
	return nil
}

// slowest fills the slowest rate of a window and what ends it.
func (m *MapWindow) slowest(window []rateSpan, list []*constraint, spans [][]rateSpan) {
	switch {
	case len(window) == 0:
		m.Note = "no rate meets all requirements"
		return
	case window[0].low <= 0:
		m.Note = "every rate looked at is fast enough"
		return
	}
	low := window[0].low
	m.SlowestHz = Fig(low)
	for _, i := range causesFirst(len(list)) {
		for _, s := range spans[i] {
			if m.BindsBelow == "" && math.Abs(s.low-low) <= sameBound*low {
				m.BindsBelow = list[i].text
			}
		}
	}
}

// causesFirst orders the constraints: what cannot run is not stable, what is not stable meets nothing.
func causesFirst(n int) []int {
	out := []int{1, 0}
	for i := 2; i < n; i++ {
		out = append(out, i)
	}
	return out
}
