package loop

import "fmt"

// maxDisturbances bounds the list.
const maxDisturbances = 20

var disturbanceKinds = []string{"sine"}

// disturbances reads the list of disturbances, each a mapping with one key.
func (r *reader) disturbances(l *Loop, n *node) {
	if n == nil {
		return
	}
	if n.kind != listNode || len(n.items) > maxDisturbances {
		r.report(n.at, fmt.Sprintf("disturbances must be a list of at most %d", maxDisturbances), "entries such as - sine: {frequency: 310 Hz}")
		return
	}
	for _, item := range n.items {
		s, broken := r.section(item, "a disturbance", disturbanceKinds...)
		if broken {
			continue
		}
		if len(item.entries) != 1 {
			r.report(item.at, fmt.Sprintf("a disturbance with %d keys", len(item.entries)), "one disturbance in one entry, each with its own dash")
			continue
		}
		if v := s.get("sine"); v != nil {
			if d, ok := r.sineDisturbance(v); ok {
				l.Disturbances = append(l.Disturbances, d)
			}
		}
	}
}

// sineDisturbance reads a vibration or a ripple of known frequency.
func (r *reader) sineDisturbance(n *node) (Disturbance, bool) {
	d := Disturbance{Kind: "sine", At: "output"}
	s, broken := r.section(n, "sine", "name", "at", "size", "frequency")
	if broken {
		return d, false
	}
	good := true
	if v := s.get("name"); v != nil {
		d.Name, good = r.text(v, "name")
	}
	if v := s.get("at"); v != nil {
		word, ok := r.choice(v, "at", "input", "output", "sensor")
		d.At, good = word, good && ok
	}
	if v := s.get("size"); v != nil {
		var in Input
		good = r.size(&in, v, "the size of the sine") && good
		d.Size, d.SizeExact = in.Size, in.SizeExact
	}
	w, ok := r.angular(s.need("frequency", "frequency: 310 Hz"), "frequency")
	d.Frequency = w
	return d, good && ok
}
