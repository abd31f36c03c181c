package poly

import (
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
)

// A point that meets the stopping test is close to some root, but in the noise
// around a large cluster there may be one point more than the cluster has roots,
// and a root elsewhere without a point. The Weierstrass correction tells:
//
//	W_i = p(x_i)/(p_n·Π_{j≠i}(x_i − x_j))
//
// All roots lie in the union of the discs |x − x_i| <= n|W_i|, and a part of the union
// that is apart from the rest holds as many roots as discs (Smith, "Error
// bounds for zeros of a polynomial based upon Gerschgorin's theorems", J. ACM 17,
// 1970; from memory). A point of a crowd has a large disc, one that reaches to the lost root.

// weierstrass returns W with z in the place of x_i, and |W| with the rounding
// error of p included; Inf where z coincides with another point.
func (h *horner) weierstrass(x []dd.Complex, i int, z dd.Complex) (w complex128, most float64) {
	v := h.double(z)
	n := len(h.p) - 1
	f, e := math.Frexp(h.p[n].Hi)
	e += h.shift*n - h.view(v.e).scale
	m := complex(f, 0) // p_n·Π is m·2^e in the scale of v
	for j, b := range x {
		if j == i {
			continue
		}
		d := difference(z, b)
		_, k := math.Frexp(math.Max(math.Abs(real(d)), math.Abs(imag(d))))
		m *= ldexp(d, -k)
		e += k
		if a := cmplx.Abs(m); a < 0x1p-400 {
			m, e = m*0x1p400, e-400
		}
	}
	if m == 0 {
		return cmplx.Inf(), math.Inf(1)
	}
	return ldexp(v.p/m, -e), math.Ldexp((cmplx.Abs(v.p)+v.bound)/cmplx.Abs(m), -e)
}

func ldexp(z complex128, n int) complex128 {
	return complex(math.Ldexp(real(z), n), math.Ldexp(imag(z), n))
}

// settle looks for lost roots: a point whose disc reaches its neighbour is tried
// elsewhere. Some passes, since a place that becomes free changes the other discs.
func (h *horner) settle(s *sweeper) {
	n := float64(len(s.x))
	for range 4 {
		moved := false
		for i, a := range s.x {
			if a.IsZero() || !a.IsFinite() {
				return // a range error, found by Roots
			}
			near := math.Inf(1)
			for j, b := range s.x {
				if j != i {
					near = math.Min(near, cmplx.Abs(difference(a, b)))
				}
			}
			if _, w := h.weierstrass(s.x, i, a); !(n*w <= near/2) && h.relocate(s, i, w) {
				moved = true
			}
		}
		if !moved {
			return
		}
	}
}

// relocate tries x_i at z − W(z), z being well outside the noise: with the other
// points on their roots this is the one root that is left. From there x_i is
// iterated alone. It stays if its disc is now less than half, else it goes back.
func (h *horner) relocate(s *sweeper, i int, w float64) bool {
	old := s.x[i]
	size := math.Min(2*float64(len(s.x))*w, old.Abs())
	z := old.Add(dd.FromComplex(cmplx.Rect(size, float64(i+1))))
	step, _ := h.weierstrass(s.x, i, z)
	if cmplx.IsInf(step) || cmplx.IsNaN(step) {
		return false
	}
	s.x[i], s.done[i] = z.Sub(dd.FromComplex(step)), false
	ok := s.run(singleSweeps, h.step(s, h.double)) && !s.x[i].IsZero() && s.x[i].IsFinite()
	s.done[i] = true
	if ok {
		if _, now := h.weierstrass(s.x, i, s.x[i]); now < w/2 {
			return true
		}
	}
	s.x[i] = old
	return false
}

// discs are the error radii of the points: n times the Weierstrass discs, since a
// point of a cluster of up to n may be a sum of so many disc radii from its root.
// 2^-100·|x| is added for the rounding of the point itself.
func (h *horner) discs(s *sweeper) []float64 {
	n := float64(len(s.x))
	out := make([]float64, len(s.x))
	for i, x := range s.x {
		out[i] = math.Inf(1)
		if !x.IsZero() && x.IsFinite() {
			_, w := h.weierstrass(s.x, i, x)
			out[i] = n*n*w + 0x1p-100*x.Abs()
		}
	}
	return out
}
