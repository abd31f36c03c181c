/*
Package loop reads the loop file: one YAML text that describes a feedback loop, from plant
to requirements. This comment is the specification of that file.

The package promises: what Parse accepts is consistent and can be computed with; what it
refuses is refused with the file, line and column, the line itself, a pointer under the
place, what was expected and the nearest known name, several problems in one run. No text
makes it panic, and every text is read in bounded time. Numbers are exact decimals from
the first digit on; none passes through a float.

Columns count characters from 1. Everything below is case-sensitive.

# The text

YAML in UTF-8, at most 64 KiB, one document, block or flow style. Anchors, aliases, merge
keys, tags, directives and duplicate keys are refused, and so is every key that is not
listed here. A text that holds ": " or " #", or begins with one of % @ & * ! | > ' " [ {, is
put in quotes. Limits of nesting: 50 lists, mappings or brackets, 200 columns of indentation.

	loop          name of the loop                               required
	output        unit of r, y and m, any text                   "units"
	effort        unit of u, any text                            "units"
	symbols       named numbers
	plant         model, dead_time, friction, backlash           required
	controller    model with map, or pid                         required
	sensor        model, converter, encoder, curve, noise, offset
	actuator      limits, bits or step, slew, deadband
	timing        rate or period, and the time-line of a tick    required
	inputs        list of inputs
	requirements  list of "name op number unit"
	settling_band percentage of the final value                  2 %
	timer         the hardware timer
	processor     what a tick costs
	rate          range of rates to search
	disturbances  list of vibrations, loads, noise and records

# Numbers and units

A number is a decimal such as 12, -0.5 or 4.7e-6: at most 200 digits, exponent from -300 to
300. Infinity and NaN are refused. Where a number belongs, an expression of numbers and
symbols may stand, such as 2*pi*K. What leaves the reader is 0 or has a magnitude from
1e-200 to 1e200.

Times and frequencies are a number and a unit, with or without a blank between; a bare
number, even 0, is an error:

	times        ns us ms s min (µs is read as us)    0 s, or 1e-15 s to 1e9 s
	frequencies  Hz kHz MHz rad/s rpm                 1 Hz = 2π rad/s = 60 rpm
	angles       deg rad
	percentages  %
	ratios       dB

Signals (sizes of inputs, limits, errors) are bare numbers in the loop's own units.

# Symbols

	symbols:
	  J:  {value: 0.018, spread: 20 %}
	  b:  0.09
	  w0: sqrt(b/J)

At most 200 of them. A value may use the symbols before it. The spread, 0 % to below 100 %,
is the tolerance to either side. A name is letters, digits and _, not beginning with a
digit, in any script; s, z, pi, sqrt and exp are taken.

# Models

A model is an expression in s (continuous) or in z (sampled, at the loop's rate), or one of

	{num: [3, 6], den: [1, 3, 5]}                    coefficients, descending powers
	{zeros: [-2], poles: [-1, [-1, 2], [-1, -2]], gain: 3}
	{A: [[0, 1], [-5, -3]], B: [0, 1], C: [6, 3], D: 0}

gain is the factor before Π(s − zero)/Π(s − pole). A complex zero or pole is a pair
[re, im], in rad/s for a model in s, and its conjugate stands in the list too; zeros and
poles may be left out when there are none. B may be a list of numbers or of rows with one
number, C a list or one row; D is 0 when left out. The entries are numbers or expressions
without s and z. With variable: z beside them these are models in z.

A model must be proper (no more zeros than poles) and not zero. Limits: 30 poles, 20
states, coefficients of about 900 digits. Common factors are not cancelled: they are
hidden modes, which the analysis reports.

# Expressions

	sum      = product { ("+" | "-") product }
	product  = unary { ("*" | "/") unary }
	unary    = ("-" | "+") unary | joined
	joined   = power { power }         the second and later ones begin with s, z or "("
	power    = atom [ "^" exponent ]
	exponent = ["-" | "+"] (number | name | "(" sum ")")
	atom     = number | name | "(" sum ")" | "sqrt" "(" sum ")" | "exp" "(" sum ")"

So -s^2 is -(s^2), a-b-c is (a-b)-c, and 2s(s+1), K(s+1), (s+1)(s+2) are products. Products
without * are allowed only before s, z and "(": 2K and 2pi are errors. A division whose
divisor is a product without * is refused, because readers differ on it: 1/2s must be
1/(2*s) or (1/2)*s. So is a power of a power without parentheses.

	s, z      the variable; both in one expression are an error
	pi        to 70 digits
	sqrt(x)   of a constant x >= 0: exact for squares of rationals, else to 66 digits
	exp(-c*s) a dead time of c >= 0 seconds; in z a delay of n ticks is z^-n
	^         an exponent is a constant with a whole value from -32 to 32

A dead time must multiply a whole model; sums of different dead times are refused. An
expression has at most 10 000 characters and 200 levels of nesting, an intermediate result
at most 64 zeros or poles and constants of about 2400 digits.

# Plant and sensor

	plant:  {model: Kt/(s*(J*s + b)), dead_time: 2 ms}
	sensor: {model: 1/(0.0004*s + 1), bits: 14, range: [-6.3, 6.3]}

Both models are in s and may have a dead time; dead_time adds to the plant's. Without a
sensor m = y. bits (1 to 32) and range, the converter's lowest and highest value in output
units, come together.

# Friction and backlash

	plant:
	  model: 0.31/(s*(0.018*s + 0.09))
	  friction: {coulomb: 0.3, static: 0.4, viscous: 0.02}
	  backlash: {gap: 0.002, at: output}

Friction is a force against the motion v of a part of the plant,

	y = plant·(u + d) − through·F(v)
	F = sign(v)·coulomb + viscous·v    while it moves
	F = whatever holds it, up to static, at rest

	coulomb   0 or more; 0 when left out
	static    coulomb or more, the force that starts a motion; coulomb when left out
	viscous   0 or more, force by velocity; 0 when left out. It adds to what the model has
	motion    position (default): the output is a position and v its rate; or velocity: v is the output
	through   a model in s without dead time, from the force to the output

One of the three forces must be above 0. Without through friction acts at the plant input,
after its dead time, and forces are in effort units; with it they are in the units of its
input. So that a force accelerates a mass, in its own direction, through (or the plant in its
place) must have exactly two poles more than zeros with motion: position, one with motion:
velocity, and a positive leading coefficient; and plant/through must be proper. All three
are decided in exact numbers. A plant with a motor lag before its mass needs through:

	plant:
	  model: 0.31/(s*(0.018*s + 0.09)*(0.002*s + 1))
	  friction: {coulomb: 0.05, through: 1/(s*(0.018*s + 0.09))}

Backlash is play of full width gap, above 0: what it drives stands still until the play is used
up. at: input (default) is between actuator and plant, in effort units; at: output is
between plant and output, in output units.

# Converter, encoder, curve

	sensor: {step: 0.001, noise: 0.002, offset: 0.01}

	step    above 0: size of a code of a converter without ends; not with bits
	noise   0 or more: rms of white noise on every sample, 0 when left out
	offset  added before the conversion, 0 when left out

are in output units, or in electric units where the sensor has a curve.

	sensor:
	  encoder: {counts_per_turn: 4096, measures: velocity, method: time, clock: 10 MHz}

An encoder stands in place of bits, step and curve.

	counts_per_turn  a whole number from 1 to 1e9, after quadrature
	measures         what the output is: position or velocity
	turn             above 0: size of a turn in the unit of the position, which for a velocity is the
	                 output's unit times a second
	method           of a velocity: counts (default), the counts of a tick over the tick, or time, one
	                 count over the time between the last two
	clock            of the timer that times the counts, with method: time; as in timer. Times have no
	                 error when it is left out

measures and turn may be left out where the unit of the output tells: rad and deg are positions
with a turn of 2π and 360, turn and turns of 1; rad/s, deg/s, turn/s and turns/s are velocities with
the same, and rpm with a turn of 60, a turn a second being 60 rpm. With any other unit, or a unit that
contradicts measures, what it does not tell must be written.

	sensor: {curve: [[0, 3.1], [25, 2.4], [60, 1.2]], bits: 12, range: [0, 3.3]}
	sensor: {curve: {file: ntc.csv}, noise: 0.004}

A curve is what the converter sees for an output, such as a thermistor's voltage: 2 to 10 000 points
[output, electric], or a file beside the loop file with the header output,electric. Outputs rise
strictly; the electric values rise or fall strictly, throughout, for else the firmware could not
tell which output it was. Slopes have magnitudes from 1e-200 to 1e200. Between the points
the sensor follows a smooth monotone curve, the firmware a straight line. bits with range, step,
noise and offset are then in electric units.

# Controller

	controller:
	  model: 4.2*(0.21*s + 1)/(0.011*s + 1)
	  map: tustin

A model in s needs a map, one of

	tustin     trapezoidal rule
	prewarped  tustin, exact at the frequency at:, which stands beside map and lies below half the rate
	matched    poles and zeros through z = e^(sT)
	forward    forward difference
	backward   backward difference
	hold       equivalent under a zero-order hold
	triangle   equivalent under a first-order hold

A constant needs none. A model in z has no map; there is then no continuous loop to
compare with. rate: or period: beside a model in z says for which rate it was made; if the
loop runs at another one, that is an error. A controller has no dead time of its own.

Beside model or pid:

	feedforward: {model, map, at}   FF: u has FF·r added
	prefilter:   {model, map, at}   F: the controller gets F·r in place of r
	anti_windup: a kind of the list below; none when left out

	none                    integrators know nothing of the limits
	clamp                   the integrator is held within the actuator's limits
	{clamp: [-10, 10]}      or within these, low and high, in effort units
	stop                    no integration while the effort is limited
	stop_outward            none while it is limited and what is integrated drives it further out
	{tracking_time: 50 ms}  back-calculation: the integrator is driven by (limited − wanted effort)/time,
	                        a time above zero

Every kind but none needs the limits of the actuator.

# PID

In place of model, with e = r − m, T the period, Td = Kd/Kp:

	parallel  u = Kp·e + Ki/s·e + Kd·s/(Tf·s + 1)·e
	standard  u = Kp·(e + 1/(Ti·s)·e + Td·s/(Tf·s + 1)·e)
	series    u = Kp·(1 + 1/(Ti·s))·(Td·s + 1)/(Tf·s + 1)·e

	pid:
	  form: parallel, standard or series
	  Kp, Ki, Kd          parallel: numbers, each may be missing
	  Kp (or K), Ti, Td   standard, series: a number and times; Ti, Td may be missing
	  filter: 1 ms        Tf; or filter_ratio: N, Tf = Td/N. A derivative needs one of them
	  derivative_on: error (default) or measurement: the derivative acts on −m
	  setpoint_weight: b  Kp·e becomes Kp·(b·r − m); 1 when left out
	  stored: plain (default) or with_period: Ki and Kd are as a program stores them,
	                      Ki·T and Kd/T (parallel form)
	  map: tustin         one for all parts, or one each: {i: forward, d: backward}
	  at: 40 Hz           with prewarped

Each part is mapped by itself and the parts are then added and multiplied. In the series
form i is the map of Kp·(1 + 1/(Ti·s)) and d that of the lead (Td·s + 1)/(Tf·s + 1); with
the derivative on the measurement d is the map of lead − 1, and with a setpoint_weight other
than 1 i is the map of Kp/(Ti·s) alone; only with matched does that make a difference. A
proportional part alone needs no map.

# Actuator

	actuator: {limits: [-24, 24], bits: 11, slew: 5000, deadband: 0.2}

limits are low and high, bits (1 to 32) divide them, slew is the largest change in effort
units per second. step, above 0, is the size of a code of the effort in place of bits. deadband, 0
or more, is half the width of a band of the effort in which the plant feels nothing; outside it feels
the effort less the deadband. Each may be left out; bits needs limits.

# Timing

	timing:
	  rate: 2 kHz            or period: 500 us; 1e-6 Hz to 1e9 Hz
	  conversion: 6 us       from the sample to the value in memory
	  latency: 1.5 us        from there to the start of the computation: interrupt entry
	  compute: 140 us        from there to the new effort known
	  update: when_ready     at once (default), next_tick, or {after: 250 us} from the sample
	  jitter: 15 us          peak, of the sampling instant
	  update_jitter: 5 us    peak, of the update instant
	  measured: ticks.csv    recorded tick times
	  missed: 1 %            ticks that do not run: no sample, the effort stays
	  stale: {every: 100}    ticks that get the measurement of the tick before
	  period_used: nominal   what the firmware takes for T: nominal (default) or measured

Times left out are zero. conversion + latency + compute must fit the tick; after: must not be shorter
than they are, and may be longer than a tick; jitter and update_jitter must each be below half a
tick. All delay of the loop together is at most 1 000 000 ticks.

measured names a CSV file beside the loop file with the header interval_s, or interval_s,delay_s:
the time between two samples, from 0.01 to 100 ticks, and the time from the sample to its update, 0 or more
and at most 1 000 000 ticks; 1 to a million rows, repeated when a run is longer. It stands in place of jitter, and
with delay_s of update_jitter too.

missed and stale are a probability, 0 % to below 100 %, of every tick by itself, or {every: n} for every
n-th tick, a whole number from 2 to 1e9. None when left out.

With period_used: measured the firmware computes each tick with the measured time since the tick before, which
needs formulas with T in them: parts that are constant or have the map forward, backward, tustin or prewarped. Parts
with another map, models in z and stored: with_period hold numbers for one T and are refused.

A loop in which the effort of a tick would need a sample that depends on it (plant and
sensor with as many zeros as poles, no delay or a measured one of 0, a controller that answers at once) is refused
as an algebraic loop, and so is one whose continuous equations have no solution
(1 + C·P·H = 0 at infinite frequency).

# Inputs

At most 20, each a mapping of one key. A kind may stand more than once; metrics refer to
the first of it.

  - step: 1                                     of r
  - ramp: 2                                     slope of r
  - parabola: 1.5                               acceleration a, r = a·t²/2
  - sine: {size: 0.1, frequency: 3 Hz}          amplitude
  - move: {distance: 1, velocity: 2, acceleration: 10, jerk: 200}    all above 0
  - file: ref.csv                               r over time, looked up beside the loop file
  - load_step: 0.5                              step of d

A file has the header t_s,r and two rows or more (at most a million), rising times from 0 on
in seconds.

# Timer, processor, rate

	timer: {clock: 72 MHz, prescaler_bits: 16, reload_bits: 16, counting: up, postscale: 1}

The hardware timer that makes the ticks. Its rates are

	counting: up       clock/((prescaler + 1)·(reload + 1)·postscale)
	counting: center   clock/(2·(prescaler + 1)·reload·postscale), up and down again, reload >= 1

with any prescaler and reload that their registers hold (as in the reference manuals of
common microcontrollers; from memory). clock and reload_bits (1 to 32) must be there;
prescaler_bits (0 to 32) is 0, counting up and postscale (1 to 65536), the periods of the
counter in a tick, 1 when left out. A clock is in Hz, kHz or MHz, 1e-6 Hz to 1e12 Hz;
rad/s and rpm are refused, for a clock counts pulses.

	processor: {cost: 55 us, budget: 40 %}
	processor: {cost_cycles: 3960, clock: 72 MHz, budget: 40 %}

cost is the processor time that a tick takes, interrupt entry, waiting for the converter
and all: it may be more than timing.compute, or less where a converter or a second core
does part of the work, and nothing compares the two. It is written as a time, or as
cost_cycles (above 0, up to 1e15) of a clock, not both. Without either timing.compute
stands for it, which must then be above zero. budget is the part of the tick that the loop
may use, above 0 % and up to 100 %, which is also what is taken when it is left out. A budget that is written is
a requirement, processor_load <= budget, for every command.

	rate: {from: 50 Hz, to: 50 kHz}

The range of rates to search, from below to, both in the range of sample rates; each end is
found by the program when it is left out. The loop's own rate is in timing.

# Disturbances

At most 20, each a mapping of one key:

  - sine: {name: gear mesh, at: sensor, size: 0.002, frequency: 310 Hz}
  - load_step: {name: tool down, size: 0.4, time: 0.2 s}
  - noise: {at: sensor, rms: 0.01, band: 200 Hz}
  - file: {name: road, at: output, file: d.csv}

name and at may be left out in each. at is input (of the plant), output or sensor: output for a sine
when left out, input for the others. Sizes are in effort units at the input, else in output units.

	sine       a vibration or ripple of known frequency. It tells where the frequency lands among the samples;
	           with a size, which is not 0, runs contain it
	load_step  a step of size, not 0, at time, 0 s when left out
	noise      random, of an rms above 0; with a band a first-order spectrum with its −3 dB corner there,
	           without one white, a new value every tick
	file       a record with the header t_s,d, two rows or more (at most a million), rising times from 0 on

# Requirements

Lines "name op number unit" with op one of <= >= < >. Names and units:

	step_error, ramp_error, parabola_error, load_error      output units; needs that input
	position_constant, velocity_constant, acceleration_constant      a number
	phase_margin                                            deg or rad
	gain_margin                                             dB
	modulus_margin                                          a number, % or dB
	delay_margin, jitter_margin                             a time
	crossover, bandwidth                                    a frequency
	overshoot                                               %
	rise_time, settling_time, recovery_time                 a time
	peak_effort, effort_noise                               effort units
	ripple, stuck_error, limit_cycle                        output units
	peak_tracking_error, rms_tracking_error                 output units; needs a move or file
	word_margin                                             bits
	processor_load                                          %
	samples_per_rise                                        a number

A figure in the loop's own units may name that unit or not. An output in rad or deg takes
limits in either.

# Overrides

Options, WithRate and WithMap give the loop of the same file at another rate or with another
map of the controller (not of prefilter and feedforward), with every check again. The prewarp
frequency of the file counts only under a map that asks for it. A model in z takes no other
rate. Numbers stored with_period stay as stored, so that Ki and Kd change. Tick times of a measured file
stay as measured and must still be 0.01 to 100 ticks long.
WithSymbols gives it with other values of symbols; those computed from them follow, unless they are given a value
themselves. DrawSymbols computes such values in the order of the file.

Loops made from each other share their numbers: nobody changes a number or a slice of a Loop.
*/
package loop
