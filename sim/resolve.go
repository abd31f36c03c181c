package sim

import "math"

// resolved is the tail of a signal, as a part of its scale, with which it counts as resolved.
const resolved = 1e-12

// indirect is the weight, in the scale of a signal, of what drives it: the rounding of a large cause
// (1e-16, times ten or so) is no unresolved detail of a small effect.
const indirect = 0.01

// unresolved is the largest tail of the signals of s, as parts of their scales.
func (w *twin) unresolved(reg *regime, s *stretch) float64 {
	worst := 0.0
	scales := w.scales(reg, s)
	for i, v := range w.signals(s) {
		if tail := v.tail(w.r); !(tail <= worst*scales[i]) {
			worst = tail / scales[i] // +Inf for a tail without a scale, NaN for NaN
		}
	}
	return worst
}

// scales gives each signal its size so far or, where that is more, a part of what drives it,
//
//	scale_i = max( size_i, 0.01·h_i·(Σ_j |A_ij|·scale_j + Σ_k |F_ik|·input_k) ),  h_i = min(h, 1/max_j |A_ij|)
//
// for a state, the sums alone for an output. A delayed measurement has the size of the measurement. Right
// after a start, signals are far smaller than what they come from.
func (w *twin) scales(reg *regime, s *stretch) []float64 {
	list := w.signals(s)
	n, nq := w.model.n, w.model.nq
	out := make([]float64, len(list))
	for i, v := range list {
		out[i] = math.Max(w.sizes[i], v.size())
	}
	m := n + nq + 1
	for j := range nq {
		out[n+j] = math.Max(out[n+j], w.sizes[m])
	}
	in := w.inputs(s, out[n:n+nq])
	sum := func(row, x []float64) float64 {
		t := 0.0
		for i, v := range row {
			t += math.Abs(v) * x[i]
		}
		return t
	}
	for range 2 { // an effect of an effect
		for i := range n {
			row := reg.a[i*n : (i+1)*n]
			h := s.h
			for _, v := range row {
				h = math.Min(h, 1/math.Abs(v))
			}
			f := reg.f[i*len(in) : (i+1)*len(in)]
			out[i] = math.Max(out[i], indirect*h*(sum(row, out[:n])+sum(f, in)))
		}
	}
	for k, row := range [][]float64{reg.y, reg.m, reg.v} {
		out[n+nq+k] = math.Max(out[n+nq+k], indirect*(sum(row[:n], out[:n])+sum(row[n:], in)))
	}
	return out
}

// gentleTurn bounds h·‖A‖ for gentle. A collocation polynomial of 10 stages leaves at most
// 0.02^10/10! = 3e-24 of the largest state there, whatever the tail of a small one looks like.
const gentleTurn = 0.02

// gentle tells that a piece of length h is so short against everything the loop and its inputs do that
// it is resolved by that alone. At the start of a chain of many lags the last ones are so small
// that their tails are the rounding of the first ones. Delayed signals have no such bound.
func (w *twin) gentle(reg *regime, h float64) bool {
	if w.model.nq > 0 {
		return false
	}
	speed := math.Max(w.cfg.Reference.w, w.cfg.Disturbance.w)
	for i := range w.model.n {
		sum := 0.0
		for _, v := range reg.a[i*w.model.n : (i+1)*w.model.n] {
			sum += math.Abs(v)
		}
		speed = math.Max(speed, sum)
	}
	return h*speed <= gentleTurn
}

// inputs are the sizes of what drives the system: signals over s, then delayed measurements.
func (w *twin) inputs(s *stretch, q []float64) []float64 {
	in := make([]float64, w.model.ng, w.model.ng+len(q))
	for i := range s.g {
		for k, v := range s.g[i] {
			in[k] = math.Max(in[k], math.Abs(v))
		}
	}
	return append(in, q...)
}

// signals lists what a piece has to resolve: states, delayed measurements, y, m̂, computed effort.
func (w *twin) signals(s *stretch) []*values {
	list := w.list[:0]
	for i := range s.x {
		list = append(list, &s.x[i])
	}
	for j := range s.q {
		list = append(list, &s.q[j])
	}
	w.list = append(list, &s.y, &s.m, &s.v)
	return w.list
}
