package loop

import (
	"fmt"
	"math/big"
)

// mostEvery bounds every n-th tick.
const mostEvery = 1_000_000_000

// chance reads how often a tick goes wrong: a probability in %, or {every: n}.
func (r *reader) chance(n *node, what string) Chance {
	if n == nil {
		return Chance{}
	}
	if n.kind == mapNode {
		s, broken := r.section(n, what, "every")
		if broken {
			return Chance{}
		}
		every, _ := r.whole(s.need("every", "every: 100, the number of ticks of which one goes wrong"), "every", 2, mostEvery)
		return Chance{Every: int64(every)}
	}
	if n.kind != textNode {
		r.report(n.at, fmt.Sprintf("%s is %s here", what, n.kind), "a probability such as 1 %, or {every: 100}")
		return Chance{}
	}
	v, ok := r.quantity(n, what, percentDim, "1 %")
	if !ok {
		return Chance{}
	}
	if v.Sign() < 0 || v.Cmp(big.NewRat(100, 1)) >= 0 {
		r.report(n.at, what+" is out of range", "0 % up to below 100 %")
		return Chance{}
	}
	p, _ := v.Quo(v, big.NewRat(100, 1)).Float64()
	return Chance{Probability: p}
}
