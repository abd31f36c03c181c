package loop

import (
	"fmt"
	"math/big"
)

// maxDisturbances bounds the list.
const maxDisturbances = 20

var disturbanceKinds = []string{"sine", "load_step", "noise", "file"}

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
		kind := item.entries[0].key
		if v := s.get(kind); v != nil {
			if d, ok := r.disturbance(kind, v); ok {
				l.Disturbances = append(l.Disturbances, d)
			}
		}
	}
}

// disturbance reads one entry.
func (r *reader) disturbance(kind string, n *node) (Disturbance, bool) {
	own := map[string][]string{
		"sine":      {"size", "frequency"},
		"load_step": {"size", "time"},
		"noise":     {"rms", "band"},
		"file":      {"file"},
	}[kind]
	d := Disturbance{Kind: kind, At: "input"}
	s, broken := r.section(n, kind, append([]string{"name", "at"}, own...)...)
	if broken {
		return d, false
	}
	var good bool
	switch kind {
	case "sine":
		d.At = "output"
		good = r.sineDisturbance(&d, s)
	case "load_step":
		d.Kind = "step"
		good = r.stepDisturbance(&d, s)
	case "noise":
		good = r.noiseDisturbance(&d, s)
	case "file":
		good = r.fileDisturbance(&d, s)
	}
	if v := s.get("name"); v != nil {
		var ok bool
		d.Name, ok = r.text(v, "name")
		good = good && ok
	}
	if v := s.get("at"); v != nil {
		word, ok := r.choice(v, "at", "input", "output", "sensor")
		d.At, good = word, good && ok
	}
	return d, good
}

// sineDisturbance reads a vibration or a ripple of known frequency.
func (r *reader) sineDisturbance(d *Disturbance, s *section) bool {
	good := true
	if v := s.get("size"); v != nil {
		good = r.disturbanceSize(d, v, "the size of the sine")
	}
	w, ok := r.angular(s.need("frequency", "frequency: 310 Hz"), "frequency")
	d.Frequency = w
	return good && ok
}

// stepDisturbance reads a step at a time.
func (r *reader) stepDisturbance(d *Disturbance, s *section) bool {
	good := r.disturbanceSize(d, s.need("size", "size: the height of the step"), "the size of the load_step")
	d.Time = new(big.Rat)
	if v := s.get("time"); v != nil {
		t, ok := r.seconds(v, "time")
		d.Time, good = t, good && ok
	}
	return good
}

// noiseDisturbance reads noise, white or of a first-order spectrum.
func (r *reader) noiseDisturbance(d *Disturbance, s *section) bool {
	n := s.need("rms", "rms: a number above 0")
	good := r.disturbanceSize(d, n, "rms")
	if good && d.Size < 0 {
		r.report(n.at, "rms is not above zero", "a number above 0")
		good = false
	}
	if v := s.get("band"); v != nil {
		w, ok := r.angular(v, "band")
		d.Band, good = w, good && ok
	}
	return good
}

// fileDisturbance reads a CSV file with the header t_s,d and rising times.
func (r *reader) fileDisturbance(d *Disturbance, s *section) bool {
	n := s.need("file", "file: a CSV file with the header t_s,d")
	if n == nil {
		return false
	}
	name, src, ok := r.openCSV(n, "t_s,d")
	d.File = name
	if !ok {
		return false
	}
	d.Times, d.Values, ok = r.timeSeries(name, src, "d")
	return ok
}

// disturbanceSize reads a size that is not zero.
func (r *reader) disturbanceSize(d *Disturbance, n *node, what string) bool {
	var in Input
	ok := r.size(&in, n, what)
	d.Size, d.SizeExact = in.Size, in.SizeExact
	return ok
}
