package study

// Caution stands wherever a figure could move a machine.
const Caution = "Caution: a linear analysis of a model is no proof of safety. Keep independent limits and emergency stops, bring the machine up at low energy, follow local codes, and have licensed practice decide where people can be hurt."

// ComparisonRow is one line of the comparison table: a figure of a column, or a word. Key is its JSON name.
type ComparisonRow struct {
	Key, Name, Unit string
	Figure          func(*Column) Figure
	Word            func(*Column) string
	Built           func(*AsBuilt) Figure // of the loop as built; nil: none
}

// ComparisonRows are the lines of the comparison table in order; text and report print these.
func ComparisonRows(c *Compare) []ComparisonRow {
	fig := func(key, name, unit string, f func(*Column) Figure) ComparisonRow {
		return ComparisonRow{Key: key, Name: name, Unit: unit, Figure: f}
	}
	built := func(r ComparisonRow, f func(*AsBuilt) Figure) ComparisonRow {
		r.Built = f
		return r
	}
	step := func(key, name, unit string, f func(*Transient) Figure) ComparisonRow {
		return built(fig("transient."+key, name, unit, func(c *Column) Figure { return f(&c.Transient) }),
			func(b *AsBuilt) Figure { return f(&b.Transient) })
	}
	rows := []ComparisonRow{
		{Key: "stable", Name: "stable", Word: func(c *Column) string {
			if c.Stable {
				return "yes"
			}
			return "NO"
		}},
		fig("type", "type (loop integrators)", "", func(c *Column) Figure { return Fig(float64(c.Type)) }),
		fig("position_constant", "position constant Kp", "", func(c *Column) Figure { return c.PositionConstant }),
		fig("velocity_constant", "velocity constant Kv", "1/s", func(c *Column) Figure { return c.VelocityConstant }),
		fig("acceleration_constant", "acceleration constant Ka", "1/s²", func(c *Column) Figure { return c.AccelerationConstant }),
	}
	units := []string{"", "s", "s²", "s³"}
	for k, u := range units {
		name := string(rune('0' + k))
		rows = append(rows, fig("tracking_series."+name, "tracking series c"+name, u, func(c *Column) Figure { return c.TrackingSeries[k] }))
	}
	for k, u := range units {
		name := string(rune('0' + k))
		rows = append(rows, fig("loop_series."+name, "loop series c"+name, u, func(c *Column) Figure { return c.LoopSeries[k] }))
	}
	rows = append(rows,
		fig("phase_margin_deg", "phase margin", "deg", func(c *Column) Figure { return c.PhaseMarginDeg }),
		fig("gain_margin_db", "gain margin (up)", "dB", func(c *Column) Figure { return c.GainMarginDB }),
		fig("gain_reduction_db", "gain reduction (down)", "dB", func(c *Column) Figure { return c.GainReductionDB }),
		fig("modulus_margin", "modulus margin min |1+L|", "", func(c *Column) Figure { return c.ModulusMargin }),
		fig("delay_margin_s", "delay margin", "s", func(c *Column) Figure { return c.DelayMarginS }),
		fig("jitter_margin_s", "jitter margin", "s", func(c *Column) Figure { return c.JitterMarginS }),
		fig("crossover_rad_s", "crossover", "rad/s", func(c *Column) Figure { return c.CrossoverRadS }),
		fig("bandwidth_rad_s", "bandwidth (−3 dB)", "rad/s", func(c *Column) Figure { return c.BandwidthRadS }),
		step("overshoot_percent", "overshoot", "%", func(t *Transient) Figure { return t.OvershootPercent }),
		step("rise_time_s", "rise time 10–90 %", "s", func(t *Transient) Figure { return t.RiseTimeS }),
		step("settling_time_s", "settling time", "s", func(t *Transient) Figure { return t.SettlingTimeS }),
		step("peak_time_s", "peak time", "s", func(t *Transient) Figure { return t.PeakTimeS }),
		step("peak_effort", "peak effort", c.Units.Effort, func(t *Transient) Figure { return t.PeakEffort }),
	)
	for _, r := range []ComparisonRow{
		step("recovery_time_s", "recovery after the limit", "s", func(t *Transient) Figure { return t.RecoveryTimeS }),
		built(fig("effort_noise", "effort noise, rms", c.Units.Effort, func(c *Column) Figure { return c.EffortNoise }),
			func(b *AsBuilt) Figure { return b.Effort }),
		built(fig("output_noise", "output noise, rms", c.Units.Output, func(c *Column) Figure { return c.OutputNoise }),
			func(b *AsBuilt) Figure { return b.Output }),
		built(fig("stuck_error", "stuck error at most", c.Units.Output, func(c *Column) Figure { return c.StuckError }),
			func(b *AsBuilt) Figure { return b.rest(func(r *Rest) Figure { return r.StuckError }) }),
	} {
		if r.says(c) { // most files have none of these
			rows = append(rows, r)
		}
	}
	return rows
}

// says tells whether some column has the figure.
func (r ComparisonRow) says(c *Compare) bool {
	for _, col := range []*Column{c.Continuous, c.Sampled} {
		if col != nil && r.Figure(col).OK {
			return true
		}
	}
	return c.AsBuilt != nil && r.Built(c.AsBuilt).OK
}

// SteadyRow is one line of the steady-error table for one input.
type SteadyRow struct {
	Key, Name string
	Unit      func(Units) string
	Figure    func(*Steady) Figure
}

// SteadyRows are the lines that apply to the kind of input s.
func SteadyRows(s Steady, u Units) []SteadyRow {
	output := func(u Units) string { return u.Output }
	named := func(text string) func(Units) string { return func(Units) string { return text } }
	label := InputLabel(s, u)
	row := func(key, name string, unit func(Units) string, f func(*Steady) Figure) SteadyRow {
		return SteadyRow{key, name, unit, f}
	}
	tracking := row("tracking_error", label+": tracking", output, func(s *Steady) Figure { return s.TrackingError })
	loopErr := row("loop_error", "  loop", output, func(s *Steady) Figure { return s.LoopError })
	ripple := row("ripple", "  ripple between ticks, p-p", output, func(s *Steady) Figure { return s.Ripple })
	worst := row("worst_error", "  worst, at and between ticks", output, func(s *Steady) Figure { return s.WorstError })
	at := func(key, name string, k int, unit func(Units) string) SteadyRow {
		return row(key, name, unit, func(s *Steady) Figure {
			if s.Asymptote == nil {
				return Figure{}
			}
			return s.Asymptote[k]
		})
	}
	switch s.Input {
	case "ramp", "parabola":
		rows := []SteadyRow{tracking, loopErr}
		if s.Asymptote != nil && (s.Asymptote[1].Value != 0 || s.Asymptote[2].Value != 0) {
			rows = append(rows,
				at("asymptote.0", "  grows as g0 + g1·t + g2·t²: g0", 0, output),
				at("asymptote.1", "    g1", 1, func(u Units) string { return PerSecond(u.Output, 1) }),
				at("asymptote.2", "    g2", 2, func(u Units) string { return PerSecond(u.Output, 2) }),
				row("end_error", "  error at the end of the run", output, func(s *Steady) Figure { return s.EndError }),
				row("end_time_s", "    length of the run", named("s"), func(s *Steady) Figure { return s.EndTimeS }))
		}
		return append(rows, ripple, worst)
	case "sine":
		tracking.Name = label + ": amplitude"
		return []SteadyRow{tracking,
			row("phase_deg", "  phase of the error to r", named("deg"), func(s *Steady) Figure { return s.PhaseDeg }),
			loopErr, ripple, worst}
	case "move", "file":
		return []SteadyRow{
			row("peak_tracking_error", label+": peak tracking", output, func(s *Steady) Figure { return s.PeakError }),
			row("rms_tracking_error", "  rms tracking", output, func(s *Steady) Figure { return s.RMSError }),
			row("end_error", "  tracking at its end", output, func(s *Steady) Figure { return s.EndError }),
			row("end_time_s", "    at time", named("s"), func(s *Steady) Figure { return s.EndTimeS })}
	}
	return []SteadyRow{tracking, loopErr, worst}
}

func (b *AsBuilt) rest(f func(*Rest) Figure) Figure {
	if b.Rest == nil {
		return Figure{}
	}
	return f(b.Rest)
}

// BuiltRow is one line about the loop as built that no other column has.
type BuiltRow struct {
	Key, Name, Unit string
	Figure          Figure
}

// BuiltRows are those lines: the loop at rest, and each input once transients are gone.
func BuiltRows(c *Compare) []BuiltRow {
	b := c.AsBuilt
	if b == nil {
		return nil
	}
	var rows []BuiltRow
	add := func(key, name, unit string, f Figure) { rows = append(rows, BuiltRow{key, name, unit, f}) }
	if r := b.Rest; r != nil {
		add("rest.limit_cycle", "limit cycle at rest, p-p", c.Units.Output, r.LimitCycle)
		if r.Cycling > 0 {
			add("rest.limit_cycle_period_s", "  its period", "s", r.PeriodS)
			add("rest.limit_cycle_effort", "  of the effort, p-p", c.Units.Effort, r.EffortPP)
		}
		add("rest.limit_cycle_bound", "  at most, by theory", c.Units.Output, r.Bound)
		add("rest.cycling", "  runs that hunt", "", Fig(float64(r.Cycling)))
		add("rest.starts", "  of", "", Fig(float64(r.Starts)))
	}
	if b.TableError.OK {
		add("sensor_table_error", "error of the sensor's table", c.Units.Output, b.TableError)
	}
	for i := range b.Steady {
		s := &b.Steady[i]
		label := InputLabel(c.Sampled.Steady[i], c.Units)
		if s.PeakError.OK || s.Input == "move" || s.Input == "file" {
			add("peak_tracking_error", label+": peak tracking", c.Units.Output, s.PeakError)
			add("rms_tracking_error", "  rms tracking", c.Units.Output, s.RMSError)
			continue
		}
		add("tracking_error", label+": mean tracking", c.Units.Output, s.TrackingError)
		add("swing", "  rms about it, at the ticks", c.Units.Output, s.Swing)
		add("ripple", "  ripple, p-p", c.Units.Output, s.Ripple)
		add("worst_error", "  worst, at and between ticks", c.Units.Output, s.WorstError)
	}
	return rows
}
