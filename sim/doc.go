// Package sim runs a loop in time: the sampled loop along the time-line of a
// tick (Run), and the continuous loop as designed beside it (Twin). Noise and Peaks say what noise and bounded
// disturbances do to the linear sampled loop without a run.
//
// The time-line of a tick, for each task on its own period:
//
//	k·T + offset + jitter   sample r and the outputs (quantize m)
//	  + delay               the effort computed from them reaches the actuator
//	                        (limited, slewed, quantized), held until the next one
//	  + dead time           the plant feels it
//
// At equal instants the order is: the outputs are sampled; the tasks that sample there
// compute, in the order of the list; new efforts are applied; the plant feels what
// arrives. So a sample at k·T sees the plant before the effort computed from it, and before
// the effort of the tick before that is due at the same instant.
//
// Between events the plant is linear with a held input and is propagated exactly, by the matrix
// exponential in increments x += (Φ−I)·x + Γ·u; dead times and loop delays are queues, so
// 10 000 ticks of them cost what one costs. Instants are exact rational phases within a
// common period, so nothing drifts: the time printed is k·T from the integer k.
//
// Hardware, where it is declared: a Sensor quantizes, counts, bends and adds noise; ticks come late, are missed or stale; an
// effort goes through limits, slew, quantizer, dead zone and play; Friction and Play switch the plant between
// linear laws, each propagated exactly, at instants found by value and slope at the ends of stretches and located to
// the last digits. Noise is a function of seed, stream and number alone, so that nothing depends on the order in which it is asked for.
// A run without any of that takes a shorter way with the same operations (runPlain).
//
// The twin is the loop as designed, with the same limits and anti-windup. Its closed loop is
// followed in polynomial pieces by collocation of order 19, which end at every kink of the
// inputs, at every switch of a limit, and at the images of both after each dead time; a dead time
// shorter than a piece is solved for within it. Against SciPy both agree to 3e-11 or better.
//
// Everything starts at rest at t = 0: signals, states and efforts are 0 before.
//
// Conventions: times in seconds, signals in the loop's own units, frequencies in rad/s.
// Matrices are rows of rows. Limits: a run stops, and says so, when a signal passes
// 1e100; total order 120.
package sim
