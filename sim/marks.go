package sim

// maxReads is the largest number of outputs that a task reads, for the streams of its sensors.
const maxReads = 64

// marks follows an encoder that times its marks through a run.
type marks struct {
	encoder *encoderState
	probe   *probe // the position
	z       []float64
	at      []float64 // a state within the stretch
	carry   []float64
	slope   []float64
	flow    *flow // that the slope belongs to
	p0, d0  float64
}

// timeMarks finds the encoders that need the instants of their marks.
func (e *engine) timeMarks() {
	for i := range e.tasks {
		for j := range e.tasks[i].sensors {
			c := e.tasks[i].sensors[j].encoder
			if c != nil && c.Velocity && c.ByTime {
				e.marks = append(e.marks, marks{
					encoder: c, probe: e.tasks[i].positions[j], z: make([]float64, len(e.z)),
					at: make([]float64, len(e.z)), carry: make([]float64, len(e.carry)),
				})
			}
		}
	}
}

// before is called at the start of a stretch.
func (k *marks) before(e *engine) {
	if k.flow != e.flow {
		k.flow, k.slope = e.flow, e.flow.derived(k.probe.row)
	}
	copy(k.z, e.z)
	k.p0, k.d0 = k.probe.value(e.z), dot(k.slope, e.z)
}

// after is called at its end, t + h.
func (k *marks) after(e *engine, t, h float64) {
	p1, d1 := k.probe.value(e.z), dot(k.slope, e.z)
	if k.encoder.Counts(k.p0) == k.encoder.Counts(p1) && k.d0*d1 >= 0 {
		return
	}
	k.encoder.follow(t, h, k.p0, k.d0, p1, d1, func(theta float64) (p, d float64) {
		copy(k.at, k.z)
		for i := range k.carry {
			k.carry[i] = 0
		}
		if err := e.flow.advanceBy(k.at, k.carry, theta); err != nil {
			return k.p0, 0 // cannot be: the whole stretch was passed without overflow
		}
		return k.probe.value(k.at), dot(k.slope, k.at)
	})
}
