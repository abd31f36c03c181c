package sim

// Limits bound the effort. The zero value does not limit.
type Limits struct {
	On        bool
	Low, High float64
}

func (l Limits) valid() bool { return !l.On || l.High > l.Low && finite([]float64{l.Low, l.High}) }

// clip returns v within the limits.
func (l Limits) clip(v float64) float64 {
	if !l.On {
		return v
	}
	if v > l.High {
		return l.High
	}
	if v < l.Low {
		return l.Low
	}
	return v
}
