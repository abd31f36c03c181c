package discretize

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// triangle is the first-order-hold (ramp-invariant) equivalent: the input is taken
// as straight lines between its samples,
//
//	H(z) = (z−1)²/(T·z) · Z{G(s)/s²}
//	(δI − A_δ) x = (Γ1/T + δ·Γ2)·u,   Γ1 = ∫_0^T e^{As} B ds,   Γ2 = (1/T) ∫_0^T e^{A(T−s)} B s ds
//	Γ1_k = T^(k+1)·exp[0, λ_0T, …, λ_kT],   Γ2_k = T^(k+1)·exp[0, 0, λ_0T, …, λ_kT]
//
// Preserved: stability, order, DC gain, integrators, the step and ramp response at the
// ticks, up to two zeros at s = 0. Distortion: a little gain is lost,
// H − G ≈ T²·(s²/12)·G(s), no phase. It passes its newest sample straight through even where G does not.
// (Franklin, Powell, Workman, Digital Control of Dynamic Systems, "triangle-hold
// equivalent"; from memory.)
func triangle(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	p, err := Prepare(m)
	if err != nil {
		return zdomain.Model{}, err
	}
	td := dd.FromRat(T)
	if p.zero {
		return sampled(lti.TF{Period: td}, T)
	}
	if err := p.check(td); err != nil {
		return zdomain.Model{}, err
	}
	e := expTable(p.nodes(td, 2))
	c := p.cascade(td, e, 2, func(c *cascade, k int) []dd.Complex {
		return []dd.Complex{e[k+2][1].Scale(c.pow[k]), e[k+2][0].Scale(c.pow[k+1])}
	})
	num := realPart(c.combine([]dd.Complex{dd.Real(p.feed)}, p.c))
	tf := lti.TF{Period: td, Poles: c.d[:p.num], OriginPoles: len(p.lambda) - p.num + p.hidden}
	tf.Num, tf.OriginZeros = p.structure(num, c.d[:p.num], 2)
	return sampled(tf, T)
}
