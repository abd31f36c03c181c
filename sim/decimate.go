package sim

import "sort"

// row is one point of a trace.
type row struct{ t, r, y, m, u float64 }

// extremes is how many rows of a group are kept: the first, and the lowest and highest of y, u and
// r − y.
const extremes = 7

// decimator keeps at most a given number of a known number of rows: all of them, or
// of equal groups those rows where something is extreme.
type decimator struct {
	group int64 // rows in a group; 1 keeps all
	seen  int64 // in the current group
	best  [extremes]row
	kept  []row
	last  row
	any   bool
}

// newDecimator is for n rows, of which max are kept, one more for the last.
func newDecimator(n int64, max int) *decimator {
	d := &decimator{group: 1}
	if n > int64(max) {
		groups := int64((max - 1) / extremes)
		d.group = (n + groups - 1) / groups
	}
	return d
}

func (d *decimator) add(p *row) {
	d.last, d.any = *p, true
	if d.group == 1 {
		d.kept = append(d.kept, *p)
		return
	}
	b := &d.best
	if d.seen == 0 {
		for i := range b {
			b[i] = *p
		}
	} else {
		d.compare(p)
	}
	if d.seen++; d.seen == d.group {
		d.flush()
	}
}

// compare notes where p is extreme in its group.
func (d *decimator) compare(p *row) {
	b := &d.best
	if p.y < b[1].y {
		b[1] = *p
	} else if p.y > b[2].y {
		b[2] = *p
	}
	if p.u < b[3].u {
		b[3] = *p
	} else if p.u > b[4].u {
		b[4] = *p
	}
	if e := p.r - p.y; e < b[5].r-b[5].y {
		b[5] = *p
	} else if e > b[6].r-b[6].y {
		b[6] = *p
	}
}

// flush keeps the rows of the group in the order of time, each once.
func (d *decimator) flush() {
	if d.seen == 0 {
		return
	}
	d.seen = 0
	b := d.best
	sort.SliceStable(b[:], func(i, j int) bool { return b[i].t < b[j].t })
	for i, p := range b {
		if i == 0 || p.t != b[i-1].t {
			d.kept = append(d.kept, p)
		}
	}
}

// rows ends the trace with its last point.
func (d *decimator) rows() []row {
	d.flush()
	if n := len(d.kept); d.any && (n == 0 || d.kept[n-1].t != d.last.t) {
		d.kept = append(d.kept, d.last)
	}
	return d.kept
}
