package study

import (
	"fmt"
	"math/big"
	"strconv"
	"strings"
)

// Degrade is what the degradation study varies. The loop at its own rate and delay
// is always part of it.
type Degrade struct {
	Rates  []*big.Rat // factors of the loop's rate, 1 left out
	Delays []Delay    // at the loop's own rate
}

// Delay is one variant of the time from sample to update.
type Delay struct {
	None  bool // no delay at all: not even conversion and compute
	Extra int  // whole ticks on top of the loop's own
}

// DefaultDegrade is twice, half and a quarter of the rate, no delay and one tick more.
func DefaultDegrade() Degrade {
	return Degrade{
		Rates:  []*big.Rat{big.NewRat(2, 1), big.NewRat(1, 2), big.NewRat(1, 4)},
		Delays: []Delay{{None: true}, {Extra: 1}},
	}
}

const (
	mostVariants = 12   // of each list: more lines than that cannot be told apart in a chart
	mostTicks    = 1000 // of extra delay
	mostFactor   = 1000 // of the rate, up or down
)

// ParseDegrade reads the flag values rates=2,0.5 and delays=none,own,+1. A list
// that is not given keeps its default; an empty list switches it off.
func ParseDegrade(flags []string) (Degrade, error) {
	out := DefaultDegrade()
	for _, f := range flags {
		name, list, ok := strings.Cut(f, "=")
		if !ok {
			return out, fmt.Errorf("%q: expected rates=LIST or delays=LIST", f)
		}
		var items []string
		if strings.TrimSpace(list) != "" {
			items = strings.Split(list, ",")
		}
		if len(items) > mostVariants {
			return out, fmt.Errorf("%s: %d entries, at most %d can be told apart in a chart", name, len(items), mostVariants)
		}
		var err error
		switch strings.TrimSpace(name) {
		case "rates":
			out.Rates, err = parseRates(items)
		case "delays":
			out.Delays, err = parseDelays(items)
		default:
			err = fmt.Errorf("%q is not a list of the study; expected rates or delays", name)
		}
		if err != nil {
			return out, err
		}
	}
	return out, nil
}

func parseRates(items []string) ([]*big.Rat, error) {
	var out []*big.Rat
	for _, s := range items {
		s = strings.TrimSuffix(strings.TrimSpace(s), "x")
		if len(s) > 20 || strings.Trim(s, "0123456789./") != "" {
			return nil, fmt.Errorf("rates: %q is not a factor such as 2, 0.5 or 1/4", cutText(s))
		}
		r, ok := new(big.Rat).SetString(s)
		if !ok {
			return nil, fmt.Errorf("rates: %q is not a factor such as 2, 0.5 or 1/4", s)
		}
		if f, _ := r.Float64(); !(f >= 1.0/mostFactor && f <= mostFactor) {
			return nil, fmt.Errorf("rates: the factor %s is outside 1/%d to %d", s, mostFactor, mostFactor)
		}
		if r.Cmp(big.NewRat(1, 1)) != 0 {
			out = append(out, r)
		}
	}
	return out, nil
}

func parseDelays(items []string) ([]Delay, error) {
	var out []Delay
	for _, s := range items {
		s = strings.TrimSpace(s)
		switch s {
		case "none":
			out = append(out, Delay{None: true})
			continue
		case "own", "+0":
			continue
		}
		n, err := strconv.Atoi(strings.TrimPrefix(s, "+"))
		if err != nil || n < 1 || n > mostTicks || !strings.HasPrefix(s, "+") {
			return nil, fmt.Errorf("delays: %q is not none, own or whole ticks added such as +1 (at most +%d)", cutText(s), mostTicks)
		}
		out = append(out, Delay{Extra: n})
	}
	return out, nil
}

func cutText(s string) string {
	if r := []rune(s); len(r) > 24 {
		return string(r[:24]) + "…"
	}
	return s
}
