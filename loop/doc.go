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
	plant         model, dead_time                               required
	controller    model with map, or pid                         required
	sensor        model, bits, range
	actuator      limits, bits, slew
	timing        rate or period, and the time-line of a tick    required
	inputs        list of inputs
	requirements  list of "name op number unit"
	settling_band percentage of the final value                  2 %
	timer         the hardware timer
	processor     what a tick costs
	rate          range of rates to search
	disturbances  list of known vibrations

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
	anti_windup: none, clamp (stop integrating while limited) or {tracking_time: 50 ms}

anti_windup needs the limits of the actuator.

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

	actuator: {limits: [-24, 24], bits: 11, slew: 5000}

limits are low and high, bits (1 to 32) divide them, slew is the largest change in effort
units per second. Each may be left out; bits needs limits.

# Timing

	timing:
	  rate: 2 kHz          or period: 500 us; 1e-6 Hz to 1e9 Hz
	  conversion: 6 us     from the sample to the value in memory
	  compute: 140 us      from there to the new effort known
	  update: when_ready   at once (default), next_tick, or {after: 250 us} from the sample
	  jitter: 15 us        peak, of the sampling instant

Times left out are zero. conversion + compute must fit the tick; after: must not be shorter
than they are, and may be longer than a tick; jitter must be below half a tick. All delay of
the loop together is at most 1 000 000 ticks.

A loop in which the effort of a tick would need a sample that depends on it (plant and
sensor with as many zeros as poles, no delay, a controller that answers at once) is refused
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

A vibration or ripple of known frequency. at is input (of the plant), output (when left
out) or sensor; name and size, not 0, may be left out. It tells where the frequency lands
among the samples; runs do not contain it.

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
	rise_time, settling_time                                a time
	peak_effort, effort_noise                               effort units
	ripple, stuck_error                                     output units
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
rate. Numbers stored with_period stay as stored, so that Ki and Kd change.
WithSymbols gives it with other values of symbols; those computed from them follow, unless they are given a value
themselves. DrawSymbols computes such values in the order of the file.

Loops made from each other share their numbers: nobody changes a number or a slice of a Loop.
*/
package loop
