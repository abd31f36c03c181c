package loop

import (
	"fmt"

	"steadytick/sdomain"
)

// friction reads the friction of the plant, which stands at the key's place at; nil when there is none or something is
// wrong. plant is nil when its model is.
func (r *reader) friction(n *node, at place, plant *sdomain.Model) *Friction {
	if n == nil {
		return nil
	}
	s, broken := r.section(n, "friction", "coulomb", "static", "viscous", "motion", "through")
	if broken {
		return nil
	}
	f := &Friction{}
	good := r.frictionForces(f, s)
	if s.has("motion") {
		word, ok := r.choice(s.get("motion"), "motion", "position", "velocity")
		f.Velocity, good = word == "velocity", good && ok
	}
	if s.has("through") {
		v := s.get("through")
		m, ok := r.continuousModel(v, "through")
		if ok && m.Delay != nil && m.Delay.Sign() != 0 {
			r.report(v.at, "through has a dead time", "a model without exp(): friction answers at once")
			ok = false
		}
		if !ok || !r.moves(f, m, plant, v.at) {
			return nil
		}
		f.Through = &m
	} else if plant == nil || !r.movesPlant(f, *plant, at) {
		return nil
	}
	if !good {
		return nil
	}
	return f
}

// frictionForces reads the three figures of friction.
func (r *reader) frictionForces(f *Friction, s *section) bool {
	good := s.fill("coulomb", &f.Coulomb, r.notNegative)
	f.Static = f.Coulomb
	still := s.fill("static", &f.Static, r.notNegative)
	if good && still && f.Static < f.Coulomb {
		r.report(s.get("static").at, "static is less than coulomb", "static: coulomb or more, the force that it takes to start a motion")
		still = false
	}
	good = s.fill("viscous", &f.Viscous, r.notNegative) && good && still
	if good && f.Static == 0 && f.Viscous == 0 {
		s.missing("friction without a force", "coulomb, static or viscous above 0", "coulomb", "static", "viscous")
		return false
	}
	return good
}

// excess is how many poles more than zeros lie between a force and the motion of a mass.
func (f *Friction) excess() (n int, motion string) {
	if f.Velocity {
		return 1, "motion: velocity"
	}
	return 2, "motion: position"
}

// movesPlant checks that a force at the plant input moves a mass, when nothing else is given for its way.
func (r *reader) movesPlant(f *Friction, plant sdomain.Model, at place) bool {
	want, _ := f.excess()
	const through = "through: the model from the force to the output"
	switch has := plant.RelativeDegree(); {
	case has != want:
		expected := "give " + through
		if other := 3 - want; has == other {
			turned := Friction{Velocity: !f.Velocity}
			_, motion := turned.excess()
			expected = fmt.Sprintf("%s, if that is what the output is; or %s", motion, through)
		}
		r.report(at, fmt.Sprintf("friction at the plant input needs a plant with %s than zeros; this one has %s",
			polesMore(want), hasPoles(has)), expected)
		return false
	case leading(plant.Ratio).Sign() < 0:
		r.report(at, "friction at the plant input needs a plant that a positive effort accelerates in the positive direction; this one goes the other way",
			"give "+through+", with a positive leading coefficient")
		return false
	}
	return true
}

// moves checks the way of the friction force that the file gives. plant is nil when it is not known.
func (r *reader) moves(f *Friction, through sdomain.Model, plant *sdomain.Model, at place) bool {
	want, motion := f.excess()
	has := through.RelativeDegree()
	switch {
	case has != want:
		r.report(at, fmt.Sprintf("through needs %s than zeros with %s; this model has %s", polesMore(want), motion, hasPoles(has)),
			"the model from the friction force to the output, such as 1/(s*(J*s + b)) for a position, 1/(J*s + b) for a velocity")
		return false
	case leading(through.Ratio).Sign() < 0:
		r.report(at, "the leading coefficient of through is negative: a force would accelerate against its own direction",
			"a positive leading coefficient, whatever the sign of the plant")
		return false
	case plant != nil && plant.RelativeDegree() < want:
		lacks := "as many zeros as poles"
		if n := plant.RelativeDegree(); n > 0 {
			lacks = polesMore(n) + " than zeros"
		}
		r.report(at, fmt.Sprintf("plant/through is improper: the plant has %s, through %s", lacks, polesMore(has)),
			"the effort acts through the same moving part as friction, so the plant has at least as many more")
		return false
	}
	return true
}

func polesMore(n int) string { return fmt.Sprintf("%s pole%s more", numberWord(n), plural(n)) }

// hasPoles words a relative degree that is not negative.
func hasPoles(n int) string {
	if n == 0 {
		return "as many zeros as poles"
	}
	return numberWord(n)
}

// backlash reads the play of the plant, nil when there is none or something is wrong.
func (r *reader) backlash(n *node) *Backlash {
	if n == nil {
		return nil
	}
	s, broken := r.section(n, "backlash", "gap", "at")
	if broken {
		return nil
	}
	b := &Backlash{}
	var good bool
	b.Gap, good = r.positive(s.need("gap", "gap: the full width of the play"), "gap")
	if s.has("at") {
		word, ok := r.choice(s.get("at"), "at", "input", "output")
		b.AtOutput, good = word == "output", good && ok
	}
	if !good {
		return nil
	}
	return b
}
