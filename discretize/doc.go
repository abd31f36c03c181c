// Package discretize turns continuous models into sampled ones, one file a
// method. Each file states its formula, what it distorts and what it preserves.
//
//	Hold       exact: plant behind a zero-order hold, any delay
//	tustin     trapezoidal rule          stable ⇔ stable, frequencies bent
//	prewarped  trapezoidal rule, exact at one frequency
//	matched    poles and zeros through z = e^{sT}
//	forward    forward difference        may destabilize
//	backward   backward difference       over-damps
//	hold       step-invariant            half a tick of extra lag
//	triangle   ramp-invariant            best magnitude and phase, samples needed at once
//
// Conventions: the sampled variable is δ = (z−1)/T, z = 1 + δT; polynomials stand
// in ascending powers; T is in seconds, delays in seconds, both exact rationals.
// Integrators stay integers (exact poles at δ = 0) and complex poles stay exact
// conjugate pairs through every method. No argument is changed.
//
// Accuracy: double-double (about 31 digits). Forming the numerator loses none of
// them for real stable poles and a constant plant numerator (every term is
// positive), and about log10 of (largest over smallest coefficient involved)
// where terms cancel; the DC term is set from the exact model in any case. Against
// 300-digit arithmetic, orders to 12 and T from 1e-7 to 0.5 s: 1e-27 relative in each
// coefficient or better, mostly 1e-31. Worse only for the hold equivalent of a plant with s²
// or more in the numerator, whose second zero lies within T of δ = 0: its
// coefficient is of order T² and good to 1e-30/T², which is 1e-16 at T = 1e-7 s.
//
// Limits, all reported as errors: the sum of Re p·T over unstable poles is at
// most 600 (e^600 ≈ 1e260), |p|·T at most 2^40, order at most 120; magnitudes
// must stay within 1e±290, which an order n at period T meets while T^n does.
package discretize
