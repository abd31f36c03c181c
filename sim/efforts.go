package sim

// efforts keeps the efforts on their way, by the number of their sample.
type efforts struct {
	ring  []float64 // its length a power of two
	count int64     // samples so far
}

// push stores the next effort; oldest is the lowest number still wanted.
func (q *efforts) push(u float64, oldest int64) {
	if oldest = max(oldest, 0); q.count-oldest >= int64(len(q.ring)) {
		grown := make([]float64, max(8, 2*len(q.ring)))
		for k := oldest; k < q.count; k++ {
			grown[k&int64(len(grown)-1)] = q.at(k)
		}
		q.ring = grown
	}
	q.ring[q.count&int64(len(q.ring)-1)] = u
	q.count++
}

func (q *efforts) at(k int64) float64 { return q.ring[k&int64(len(q.ring)-1)] }
