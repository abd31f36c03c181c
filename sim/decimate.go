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

	low, high float64 // r − y of best[5] and best[6]
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

// dull counts a row that is neither kept nor extreme in its group, and says so; its other values are then not needed.
// Without a row for every count, last is to be given at the end: see add.
func (d *decimator) dull(y, u, miss float64) bool {
	if d.seen == 0 || d.seen+1 >= d.group {
		return false
	}
	b := &d.best
	if y < b[1].y || y > b[2].y || u < b[3].u || u > b[4].u || miss < d.low || miss > d.high {
		return false
	}
	d.seen++
	return true
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
		d.low, d.high = p.r-p.y, p.r-p.y
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
	if e := p.r - p.y; e < d.low {
		b[5], d.low = *p, e
	} else if e > d.high {
		b[6], d.high = *p, e
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
