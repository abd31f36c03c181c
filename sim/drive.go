package sim

import (
	"fmt"
	"math"
	"strings"
)

// held is an input column of the plant that follows the effort of a task through a channel.
type held struct {
	task, channel, column int
	next                  int64   // number of the sample whose effort arrives next; negative: none yet
	stands                float64 // behind the play of the task
}

// driven is a group of input columns that follow a signal through a channel: the value and
// its derivatives, or a sine and its cosine.
type driven struct {
	signal        *Signal
	delay         float64
	channel       int
	column, width int
	piece         int     // −1 before the signal starts
	change        float64 // instant of the next piece
}

// shaken is an input column of the plant that follows random noise, a new value at every period of the first
// task; behind is the dead time of its channel in whole periods, rounded up.
type shaken struct {
	noise           coloured
	channel, column int
	behind          []float64 // values on their way, a ring
	at              int
}

// layout is the list of the input columns of a run.
type layout struct {
	held    []held
	driven  []driven
	shaken  []shaken
	columns int

	friction, play int // columns of the dry friction force and of what play adds to y; −1: none
	frictionFrom   int // channels of these
	playFrom       int
	single         bool // no input has two channels: the sensor has no dead time
}

// newLayout gives every (task, channel) and every (disturbance, channel) its columns.
func newLayout(cfg *Config) *layout {
	l := &layout{friction: -1, play: -1, single: true}
	ways := make([]int, cfg.System.inputs)
	for _, c := range cfg.System.channels {
		ways[c.Input]++
		l.single = l.single && ways[c.Input] == 1
	}
	for i := range cfg.Tasks {
		for ch, c := range cfg.System.channels {
			for _, in := range cfg.Tasks[i].Drives {
				if c.Input == in {
					l.held = append(l.held, held{task: i, channel: ch, column: l.columns})
					l.columns++
				}
			}
		}
	}
	for i := range cfg.Disturbances {
		d := &cfg.Disturbances[i]
		if d.Signal.IsZero() {
			continue
		}
		for ch, c := range cfg.System.channels {
			if c.Input != d.Input {
				continue
			}
			delay, _ := c.Delay.Float64()
			width := d.Signal.degree() + 1
			if d.Signal.w > 0 {
				width = 2
			}
			l.driven = append(l.driven, driven{
				signal: &d.Signal, delay: delay, channel: ch, column: l.columns, width: width,
				piece: -1, change: delay,
			})
			l.columns += width
		}
	}
	l.noise(cfg)
	for ch, c := range cfg.System.channels {
		if cfg.Friction != nil && c.Input == InputFriction {
			l.friction, l.frictionFrom = l.columns, ch
			l.columns++
		}
		if cfg.Play != nil && c.Input == InputOutput {
			l.play, l.playFrom = l.columns, ch
			l.columns++
		}
	}
	return l
}

// noise gives every (random disturbance, channel) its column.
func (l *layout) noise(cfg *Config) {
	period, _ := cfg.Tasks[0].Period.Float64()
	for i, d := range cfg.Random {
		for ch, c := range cfg.System.channels {
			if c.Input != d.Input {
				continue
			}
			delay, _ := c.Delay.Float64()
			l.shaken = append(l.shaken, shaken{
				noise:   newColoured(newDice(cfg.Seed, streamDisturbance+uint64(i)), d.RMS, d.Band, period),
				channel: ch, column: l.columns, behind: make([]float64, int(math.Ceil(delay/period*(1-1e-12)))),
			})
			l.columns++
		}
	}
}

// step is the value of the noise for the period that begins.
func (s *shaken) step() float64 {
	v := s.noise.next()
	if len(s.behind) == 0 {
		return v
	}
	v, s.behind[s.at] = s.behind[s.at], v
	s.at = (s.at + 1) % len(s.behind)
	return v
}

// added tells whether a column is a disturbance that adds to y as it is.
func (l *layout) added(s *Continuous, column int) bool {
	for _, d := range l.driven {
		if column >= d.column && column < d.column+d.width {
			return s.channels[d.channel].Input == InputOutput
		}
	}
	for _, d := range l.shaken {
		if column == d.column {
			return s.channels[d.channel].Input == InputOutput
		}
	}
	return false
}

// matrices are those of the system with these columns.
func (l *layout) matrices(s *Continuous) matrices {
	m := l.columns
	b, w := make([]float64, s.n*m), make([]float64, m*m)
	for _, h := range l.held {
		fill(b, s.channels[h.channel].B, m, h.column)
	}
	for _, d := range l.shaken {
		fill(b, s.channels[d.channel].B, m, d.column)
	}
	if l.friction >= 0 {
		fill(b, s.channels[l.frictionFrom].B, m, l.friction)
	}
	if l.play >= 0 {
		fill(b, s.channels[l.playFrom].B, m, l.play)
	}
	for _, d := range l.driven {
		fill(b, s.channels[d.channel].B, m, d.column)
		for k := 0; k+1 < d.width; k++ {
			w[(d.column+k)*m+d.column+k+1] = 1
		}
		if d.signal.w > 0 {
			w[d.column*m+d.column+1] = d.signal.w
			w[(d.column+1)*m+d.column] = -d.signal.w
		}
	}
	return matrices{s.n, m, s.a, b, w}
}

// key names the columns of a flow built on a system.
func (l *layout) key() string {
	var key strings.Builder
	for _, h := range l.held {
		fmt.Fprintf(&key, "h%d ", h.channel)
	}
	for _, d := range l.driven {
		fmt.Fprintf(&key, "d%d,%d,%x ", d.channel, d.width, math.Float64bits(d.signal.w))
	}
	for _, d := range l.shaken {
		fmt.Fprintf(&key, "n%d ", d.channel)
	}
	fmt.Fprintf(&key, "f%d p%d", l.friction, l.play)
	return key.String()
}

func fill(b, col []float64, m, j int) {
	for i, v := range col {
		b[i*m+j] = v
	}
}

// through is the direct way from the columns to output k.
func (l *layout) through(s *Continuous, k int) []float64 {
	out := make([]float64, l.columns)
	for _, h := range l.held {
		out[h.column] = s.channels[h.channel].D[k]
	}
	for _, d := range l.driven {
		out[d.column] = s.channels[d.channel].D[k]
	}
	for _, d := range l.shaken {
		out[d.column] = s.channels[d.channel].D[k]
	}
	if l.friction >= 0 {
		out[l.friction] = s.channels[l.frictionFrom].D[k]
	}
	if l.play >= 0 {
		out[l.play] = s.channels[l.playFrom].D[k]
	}
	return out
}

// start puts the columns of the signal for the instant t into w, going on to the next
// piece where it is due.
func (d *driven) start(t float64, w []float64) {
	for t >= d.change {
		d.piece++
		d.change = math.Inf(1)
		if d.piece+1 < len(d.signal.starts) {
			d.change = d.signal.starts[d.piece+1] + d.delay
		}
	}
	w = w[d.column : d.column+d.width]
	if d.piece < 0 {
		return
	}
	if om := d.signal.w; om > 0 {
		s, c := math.Sincos(om * (t - d.delay))
		w[0], w[1] = d.signal.size*s, d.signal.size*c
		return
	}
	tau := t - d.delay - d.signal.starts[d.piece]
	c := &d.signal.coef[d.piece]
	values := [4]float64{
		c[0] + tau*(c[1]+tau*(c[2]+tau*c[3])),
		c[1] + tau*(2*c[2]+tau*3*c[3]),
		2*c[2] + tau*6*c[3],
		6 * c[3],
	}
	copy(w, values[:])
}

// cursor evaluates a signal at instants that never fall.
type cursor struct {
	signal *Signal
	piece  int
}

func (c *cursor) at(t float64) float64 {
	s := c.signal
	if len(s.starts) == 0 || t < 0 {
		return s.At(t)
	}
	for c.piece+1 < len(s.starts) && t >= s.starts[c.piece+1] {
		c.piece++
	}
	return s.inPiece(c.piece, t)
}
