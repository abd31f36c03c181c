package charts

import (
	"fmt"
	"math"

	"steadytick/study"
)

// frequency draws gain and phase of the loop frequency response L.
func (cv *canvas) frequency(c *study.Compare) (section, error) {
	s := section{ID: "frequency", Title: "Loop frequency response"}
	both := append(append([]study.Curve{}, c.Curves.GainDB...), c.Curves.PhaseDeg...)
	x := logAxis("angular frequency", "rad/s", both)
	half := mark{onX: true, at: c.Curves.NyquistRadS, text: "half the sample rate"}
	marks := []mark{}
	if half.at > 0 && finite(half.at) {
		marks = append(marks, half)
	}
	gain := chart{id: "loop-gain", x: x, y: axis{quantity: "gain of L", unit: plain("dB")},
		series: cv.styled(c.Curves.GainDB), marks: append(marks[:len(marks):len(marks)], mark{at: 0, text: "0 dB"})}
	if err := cv.add(&s, gain, "Gain", "", 320); err != nil {
		return s, err
	}
	phase := chart{id: "loop-phase", x: x, y: phaseAxis(c.Curves.PhaseDeg),
		series: cv.styled(c.Curves.PhaseDeg), marks: append(marks[:len(marks):len(marks)], mark{at: -180, text: "−180°"})}
	err := cv.add(&s, phase, "Phase", "", 320)
	return s, err
}

// phaseAxis has its ticks at multiples of 45°, 90°, 180° …, at most eight of them.
func phaseAxis(curves []study.Curve) axis {
	a := axis{quantity: "phase of L", unit: plain("deg")}
	low, high, ok := span(curves, ys, all)
	if !ok {
		return a
	}
	a.interval = 45
	for (high-low)/a.interval > 8 && a.interval < 1e12 {
		a.interval *= 2
	}
	low, high = math.Floor(low/a.interval)*a.interval, math.Ceil(high/a.interval)*a.interval
	if low == high {
		high += a.interval
	}
	a.min, a.max = &low, &high
	return a
}

// poles draws the closed-loop poles in the s plane.
func (cv *canvas) poles(c *study.Compare) (section, error) {
	s := section{ID: "poles", Title: "Closed-loop poles"}
	ch := chart{id: "closed-poles", zoomY: true, series: cv.styled(c.Curves.Poles),
		x: axis{quantity: "real part", unit: plain("rad/s")}, y: axis{quantity: "imaginary part", unit: plain("rad/s")},
		marks: []mark{{onX: true, at: 0, text: "stability boundary"}}}
	for i := range ch.series {
		ch.series[i].style = ch.series[i].style.crossed(i%2 == 1)
	}
	outside := ch.lookAtDominant(c)
	note := "Equivalent poles: of the sampled loop, ln(z)/T."
	if outside > 0 {
		note += fmt.Sprintf(" The first view shows the slow poles; %d lie outside it, the sliders reach them.", outside)
	}
	err := cv.add(&s, ch, "Equivalent poles in the s plane", note, 420)
	return s, err
}

// lookAtDominant sets the axes to all poles and the first view to those within five times the highest
// crossing of |L| = 1 from the origin or right of the imaginary axis. It returns how many are outside that view.
func (c *chart) lookAtDominant(r *study.Compare) int {
	fast := 0.0
	for _, col := range []*study.Column{r.Continuous, r.Sampled} {
		if col == nil {
			continue
		}
		for _, g := range col.GainCrossings {
			fast = max(fast, g.RadS)
		}
	}
	radius := 5 * fast
	if fast == 0 {
		radius = math.Inf(1)
	}
	whole, near := newBox(), newBox()
	for _, s := range c.series {
		for i := range min(len(s.curve.X), len(s.curve.Y)) {
			x, y := s.curve.X[i], s.curve.Y[i]
			whole.include(x, y)
			if math.Hypot(x, y) <= radius || x >= 0 {
				near.include(x, y)
			}
		}
	}
	if whole.empty() || !whole.finite() {
		return 0
	}
	if near.empty() {
		near = whole
	}
	whole, near = whole.padded(), near.padded()
	c.x.min, c.x.max, c.y.min, c.y.max = &whole.left, &whole.right, &whole.bottom, &whole.top
	c.view = [][2]float64{{near.left, near.right}, {near.bottom, near.top}}
	outside := 0
	for _, s := range c.series {
		for i := range s.curve.X {
			if !near.holds(s.curve.X[i], s.curve.Y[i]) {
				outside++
			}
		}
	}
	return outside
}

// box is a rectangle in the s plane.
type box struct{ left, right, bottom, top float64 }

func newBox() box {
	return box{math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)}
}

func (b *box) include(x, y float64) {
	b.left, b.right = min(b.left, x), max(b.right, x)
	b.bottom, b.top = min(b.bottom, y), max(b.top, y)
}

func (b box) empty() bool { return b.left > b.right }
func (b box) finite() bool {
	return finite(b.left) && finite(b.right) && finite(b.bottom) && finite(b.top)
}
func (b box) holds(x, y float64) bool {
	return x >= b.left && x <= b.right && y >= b.bottom && y <= b.top
}

// padded widens the box by a tenth each way, takes in the imaginary axis, and rounds to readable numbers.
func (b box) padded() box {
	b.right = max(b.right, 0)
	w, h := b.right-b.left, b.top-b.bottom
	if w == 0 {
		w = max(h, 1)
	}
	if h == 0 {
		h = w
	}
	b.left, b.right, _ = round(b.left-0.1*w, b.right+0.1*w)
	b.bottom, b.top, _ = round(b.bottom-0.1*h, b.top+0.1*h)
	return b
}
