package sim

import "math"

// dice is a source of random numbers that are functions of a seed, a stream and a number alone, so that
// a run does not depend on the order in which they are asked for. It is the output function of the
// generator of Steele, Lea and Flood ("Fast splittable pseudorandom number generators", OOPSLA
// 2014; constants from memory, the tests hold moments and correlations) at the counter's value.
type dice uint64

const golden = 0x9e3779b97f4a7c15

func mix(z uint64) uint64 {
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// newDice is stream number stream of a seed.
func newDice(seed, stream uint64) dice { return dice(mix(mix(seed+golden) + stream*golden)) }

// uniform is number k, in (0, 1), each of 2^52 values as likely.
func (d dice) uniform(k int64) float64 {
	return (float64(mix(uint64(d)+uint64(k)*golden)>>12) + 0.5) / (1 << 52)
}

// normal is number k with mean 0 and variance 1, by the inverse of the distribution.
func (d dice) normal(k int64) float64 { return math.Sqrt2 * math.Erfinv(2*d.uniform(k)-1) }

// Streams of random numbers of one task. Disturbances and sensors have streams after these.
const (
	streamSample = iota
	streamUpdate
	streamMissed
	streamStale
	streamsOfTask
	streamSensor      = 1 << 20
	streamDisturbance = 1 << 21
)

// UniformJitter shifts instant k by a uniform random time within ±peak seconds, the same for the same seed.
// update tells apart the instants of update from those of the sample.
func UniformJitter(seed uint64, update bool, peak float64) func(k int64) float64 {
	stream := uint64(streamSample)
	if update {
		stream = streamUpdate
	}
	d := newDice(seed, stream)
	return func(k int64) float64 { return peak * (2*d.uniform(k) - 1) }
}

// MeasuredJitter is how far sample k lies from k·period when the intervals between samples are those
// measured, in seconds, over again when they are used up.
func MeasuredJitter(intervals []float64, period float64) func(k int64) float64 {
	n := int64(len(intervals))
	late := make([]float64, n+1) // of sample i within one pass of the list
	for i, v := range intervals {
		late[i+1] = late[i] + (v - period)
	}
	return func(k int64) float64 { return float64(k/n)*late[n] + late[k%n] }
}

// Repeated gives value k of a list, over again when it is used up.
func Repeated(list []float64) func(k int64) float64 {
	return func(k int64) float64 { return list[k%int64(len(list))] }
}

// Chance is how often something befalls a tick: with a probability, independent of the other ticks, or
// every n-th tick (number n−1 first). The zero value is never.
type Chance struct {
	Probability float64 // 0 to 1
	Every       int64   // 0: not used
}

// On is whether it befalls tick k; stale tells apart what befalls the measurement.
func (c Chance) On(seed uint64, stale bool) func(k int64) bool {
	stream := uint64(streamMissed)
	if stale {
		stream = streamStale
	}
	d := newDice(seed, stream)
	switch {
	case c.Every > 0:
		return func(k int64) bool { return k%c.Every == c.Every-1 }
	case c.Probability > 0:
		return func(k int64) bool { return d.uniform(k) < c.Probability }
	}
	return nil
}

// coloured is noise of a given rms: white, a new value every step, or the output of a first-order lag with
// the corner band,
//
//	n[k+1] = a·n[k] + √(1 − a²)·rms·ξ[k],  a = e^(−band·step)
//
// which has the rms and the spectrum of the continuous process at the steps (exact for a process with
// an exponential correlation).
type coloured struct {
	dice  dice
	a, b  float64
	value float64
	k     int64
}

// newColoured: band in rad/s, 0 for white; step in seconds.
func newColoured(d dice, rms, band, step float64) coloured {
	c := coloured{dice: d, b: rms}
	if band > 0 {
		c.a = math.Exp(-band * step)
		c.b = rms * math.Sqrt(-math.Expm1(-2*band*step))
		c.value = rms * d.normal(-1) // as if it had always been there
	}
	return c
}

// next is the value for the step that begins.
func (c *coloured) next() float64 {
	c.value = c.a*c.value + c.b*c.dice.normal(c.k)
	c.k++
	return c.value
}
