package sim

import "container/heap"

// keptOrder is the order of a kink (the lowest derivative of the effort that jumps) up to
// which a piece of the continuous loop ends there; what is smoother is left to the check of
// each piece.
const keptOrder = 9.0

// bound is an instant at which a piece has to end.
type bound struct {
	t      float64
	order  float64 // of the kink
	images bool    // it comes back after each lag
}

// bounds is a heap of instants, the earliest first.
type bounds []bound

func (b bounds) Len() int           { return len(b) }
func (b bounds) Less(i, j int) bool { return b[i].t < b[j].t }
func (b bounds) Swap(i, j int)      { b[i], b[j] = b[j], b[i] }
func (b *bounds) Push(x any)        { *b = append(*b, x.(bound)) }
func (b *bounds) Pop() any {
	old := *b
	x := old[len(old)-1]
	*b = old[:len(old)-1]
	return x
}

// put adds an instant at or after 0.
func (b *bounds) put(x bound) {
	if x.t >= 0 {
		heap.Push(b, x)
	}
}

// take removes the instants up to t and adds their images, smoother by smoothing, after
// each lag. It returns the lowest order met, and whether there was one.
func (b *bounds) take(t float64, lags []float64, smoothing float64) (order float64, any bool) {
	order = keptOrder + 1
	for len(*b) > 0 && (*b)[0].t <= t {
		x := heap.Pop(b).(bound)
		any = true
		if !x.images {
			continue
		}
		order = min(order, x.order)
		if next := x.order + smoothing; next <= keptOrder {
			for _, lag := range lags {
				b.add(bound{max(x.t, 0) + lag, next, true}, t)
			}
		}
	}
	return order, any
}

// add is put, but an instant that is as good as the earliest one is joined with it.
func (b *bounds) add(x bound, t float64) {
	for i := range *b {
		y := &(*b)[i]
		if d := y.t - x.t; d <= 1e-13*x.t && -d <= 1e-13*x.t && y.images {
			y.order = min(y.order, x.order)
			return
		}
		if i > 64 {
			break // joining is a saving, not a need
		}
	}
	b.put(x)
}
