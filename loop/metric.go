package loop

// Metric is a figure of the sampled loop that requirements can name.
type Metric struct {
	Name string
	// Unit is the base unit of the figure: "output" and "effort" for the loop's own
	// units, "s", "rad/s", "deg", "dB", "%", "bits", or "" for a plain number.
	Unit string
	// Inputs are the kinds of input of which the loop file must have one, nil for none.
	Inputs []string
}

// metrics in the order of the documentation.
var metrics = []Metric{
	{"step_error", "output", []string{"step"}},
	{"ramp_error", "output", []string{"ramp"}},
	{"parabola_error", "output", []string{"parabola"}},
	{"load_error", "output", []string{"load_step"}},
	{"position_constant", "", nil},
	{"velocity_constant", "", nil},
	{"acceleration_constant", "", nil},
	{"phase_margin", "deg", nil},
	{"gain_margin", "dB", nil},
	{"modulus_margin", "", nil},
	{"delay_margin", "s", nil},
	{"jitter_margin", "s", nil},
	{"crossover", "rad/s", nil},
	{"bandwidth", "rad/s", nil},
	{"overshoot", "%", nil},
	{"rise_time", "s", nil},
	{"settling_time", "s", nil},
	{"recovery_time", "s", nil},
	{"peak_effort", "effort", nil},
	{"ripple", "output", []string{"step", "ramp", "parabola", "sine", "load_step"}},
	{"peak_tracking_error", "output", []string{"move", "file"}},
	{"rms_tracking_error", "output", []string{"move", "file"}},
	{"effort_noise", "effort", nil},
	{"stuck_error", "output", nil},
	{"limit_cycle", "output", nil},
	{"word_margin", "bits", nil},
	{"processor_load", "%", nil},
	{"samples_per_rise", "", nil},
}

// Metrics lists the metrics that requirements can name.
func Metrics() []Metric { return append([]Metric(nil), metrics...) }

// FindMetric looks a metric up by its name.
func FindMetric(name string) (Metric, bool) {
	for _, m := range metrics {
		if m.Name == name {
			return m, true
		}
	}
	return Metric{}, false
}

func metricNames() []string {
	var out []string
	for _, m := range metrics {
		out = append(out, m.Name)
	}
	return out
}
