package study

import (
	"math"
	"math/big"
	"math/cmplx"

	"steadytick/loop"
)

// Items of the ledger that are not the doing of sampling, or are no pure delay.
const (
	itemDeadTime = "plant dead time"
	itemSensor   = "sensor lag"
	itemMap      = "controller map"
	itemLatency  = "interrupt latency"
)

// ledger lists what adds lag around the sampled loop. Pure delays are seconds times
// crossover; a sensor's seconds are its lag at low frequency, −H'(0)/H(0), and its
// degrees the phase at crossover; the map's degrees are the phase of the mapped
// controller against the continuous one there.
func ledger(l *loop.Loop, sampled *analyzed, cont *analyzed) []LedgerItem {
	w, ok := sampled.margins.Crossover, sampled.margins.HasCrossover
	degrees := func(seconds float64) Figure {
		if !ok {
			return Figure{}
		}
		return Fig(seconds * w * 180 / math.Pi)
	}
	T := l.Timing.Period
	wait := new(big.Rat).Sub(l.Timing.LoopDelay(), l.Timing.Conversion)
	wait.Sub(wait, l.Timing.Compute)
	latency := new(big.Rat)
	if positive(l.Timing.Latency) {
		latency = l.Timing.Latency
		wait.Sub(wait, latency)
	}
	var out []LedgerItem
	for _, x := range []struct {
		item    string
		seconds *big.Rat
	}{
		{"hold, half a tick", new(big.Rat).Quo(T, big.NewRat(2, 1))},
		{"conversion", l.Timing.Conversion},
		{itemLatency, latency},
		{"compute", l.Timing.Compute},
		{"waiting for the update", wait},
		{itemDeadTime, l.Plant.Delay},
	} {
		if x.item == itemLatency && latency.Sign() == 0 {
			continue // most files do not declare one
		}
		s, _ := x.seconds.Float64()
		out = append(out, LedgerItem{x.item, s, degrees(s)})
	}
	if _, static := staticSensor(l.Sensor); !static {
		out = append(out, sensorItem(l, w, ok))
	}
	if cont != nil && ok {
		turn := cmplx.Phase(cont.block.sys.Cm.Freq(w) / sampled.block.sys.Cm.Freq(w))
		out = append(out, LedgerItem{itemMap, turn / w, Fig(turn * 180 / math.Pi)})
	}
	return out
}

// sensorItem is the sensor's share: lag at low frequency, phase at crossover.
func sensorItem(l *loop.Loop, w float64, ok bool) LedgerItem {
	item := LedgerItem{Item: itemSensor}
	start, c := l.Sensor.Model.Laurent(2)
	if start == 0 && len(c) > 1 {
		q := new(big.Rat).Quo(c[1], c[0])
		s, _ := q.Float64()
		item.Seconds = -s
	}
	if tf, err := l.Sensor.Model.TF(); err == nil && ok {
		item.Degrees = Fig(-cmplx.Phase(tf.Freq(w)/complex(math.Copysign(1, real(tf.Freq(w*1e-6))), 0)) * 180 / math.Pi)
	}
	return item
}
