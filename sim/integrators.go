package sim

import (
	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/internal/poly"
)

// splitIntegrators takes the poles at the origin out of g (its delay apart),
//
//	g = ρ[0]/x + ρ[1]/x² + … + ρ[k−1]/x^k + rest
//
// by partial fractions at x = 0 in double-double: with N/P = g·x^k, the ρ are the first k Taylor
// coefficients of N/P backward, and rest = (N − P·Σ_{j<k} g_j x^j)/(x^k P), the division
// by x^k being exact. Poles and zeros at the origin cancel here.
func splitIntegrators(g lti.TF) (rho []float64, rest lti.TF) {
	k := g.OriginPoles - g.OriginZeros
	if k <= 0 || len(g.Num) == 0 {
		return nil, g
	}
	den := poly.FromRoots(g.Poles)
	taylor := make(poly.Poly, k)
	for j := range taylor {
		v := at(g.Num, j)
		for i := range j {
			v = v.Sub(taylor[i].Mul(at(den, j-i)))
		}
		taylor[j] = v.Div(den[0])
	}
	rho = make([]float64, k)
	for j := range rho {
		rho[j] = taylor[k-1-j].Float64()
	}
	full := g.Num.Add(taylor.Mul(den).Scale(dd.New(-1)))
	rest = lti.TF{Poles: g.Poles, Period: g.Period, Ticks: g.Ticks, DeadTime: g.DeadTime}
	if len(full) > k {
		rest.Num = full[k:].Trim()
	}
	return rho, rest
}

func at(p poly.Poly, i int) dd.Float {
	if i < len(p) {
		return p[i]
	}
	return dd.Zero
}
