package loop

import (
	"fmt"
	"math/big"
)

// mostCounts bounds the counts of a turn.
const mostCounts = 1_000_000_000

// turnUnits are the units of output whose turn is known: the size of a turn in the unit of the position, which is
// that of a velocity times a second.
var turnUnits = []struct {
	name     string
	velocity bool
	turn     *big.Rat
}{
	{"rad", false, twoPi}, {"deg", false, big.NewRat(360, 1)}, {"turn", false, big.NewRat(1, 1)}, {"turns", false, big.NewRat(1, 1)},
	{"rad/s", true, twoPi}, {"deg/s", true, big.NewRat(360, 1)}, {"turn/s", true, big.NewRat(1, 1)}, {"turns/s", true, big.NewRat(1, 1)},
	{"rpm", true, big.NewRat(60, 1)}, // a turn in a second is 60 rpm
}

// encoder reads a part that counts marks, nil when there is none or something is wrong.
func (r *reader) encoder(l *Loop, n *node) *Encoder {
	if n == nil {
		return nil
	}
	s, broken := r.section(n, "encoder", "counts_per_turn", "measures", "turn", "method", "clock")
	if broken {
		return nil
	}
	e := &Encoder{}
	counts, good := r.whole(s.need("counts_per_turn", "counts_per_turn: 4096, after quadrature"), "counts_per_turn", 1, mostCounts)
	e.CountsPerTurn = int64(counts)
	measured := r.measures(e, l, s)
	good = r.turn(e, l, s, measured) && measured && good
	good = r.counting(e, s, measured) && good
	if !good {
		return nil
	}
	return e
}

// measures reads whether the output is the position that is counted or its rate. Some units of the output tell.
func (r *reader) measures(e *Encoder, l *Loop, s *section) bool {
	if s.has("measures") {
		word, ok := r.choice(s.get("measures"), "measures", "position", "velocity")
		e.Velocity = word == "velocity"
		return ok
	}
	for _, u := range turnUnits {
		if u.name == l.Output {
			e.Velocity = u.velocity
			return true
		}
	}
	s.missing("encoder does not tell what it measures", fmt.Sprintf("measures: position or velocity; the unit %s does not tell", quote(l.Output)), "measures")
	return false
}

// turn reads the size of a turn. known tells that what the output is stands.
func (r *reader) turn(e *Encoder, l *Loop, s *section, known bool) bool {
	if s.has("turn") {
		v, ok := r.positive(s.get("turn"), "turn")
		e.Turn = v
		return ok
	}
	if !known {
		return false
	}
	what := "a position"
	if e.Velocity {
		what = "a velocity"
	}
	for _, u := range turnUnits {
		if u.name == l.Output && u.velocity == e.Velocity {
			e.Turn, _ = u.turn.Float64()
			return true
		}
	}
	expected := "turn: the size of a turn in the unit of the output, such as 2*pi"
	if e.Velocity {
		expected = "turn: the size of a turn in the unit of the output times a second, such as 2*pi"
	}
	s.missing(fmt.Sprintf("the size of a turn is not known: %s is no unit of %s that tells", quote(l.Output), what), expected, "turn")
	return false
}

// counting reads how a velocity is made of counts. known tells that what the output is stands.
func (r *reader) counting(e *Encoder, s *section, known bool) bool {
	good := true
	if s.has("method") {
		var word string
		word, good = r.choice(s.get("method"), "method", "counts", "time")
		e.ByTime = word == "time"
		if known && !e.Velocity {
			r.report(s.keyAt("method"), "method beside a position, which is counted", "method only with measures: velocity")
			good = false
		}
	}
	if !s.has("clock") {
		return good
	}
	if good && !e.ByTime {
		r.report(s.keyAt("clock"), "clock without method: time", "clock: of the timer that times the counts, only with method: time")
		good = false
	}
	clock, ok := r.clock(s.get("clock"))
	if ok {
		e.Clock, _ = clock.Float64()
	}
	return good && ok
}
