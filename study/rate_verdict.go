package study

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// answer is one or two sentences that say which rates work, what to pick, and what ends the window.
func (j *rateJob) answer() error {
	j.r.Verdict = j.verdict()
	return nil
}

func (j *rateJob) verdict() string {
	r := j.r
	if len(j.window) == 0 {
		text := "No sample rate meets all requirements."
		if r.Conflict != nil && len(r.Conflict.Text) > 0 {
			text += " " + r.Conflict.Text[0]
		}
		return text
	}
	text := "The loop works " + spansText(j.window) + "."
	text += j.fileRate()
	p := r.Pick
	if p == nil {
		return text + " No pick: " + r.PickNote + "."
	}
	text += fmt.Sprintf(" Pick %s, %s.", hertzText(p.RateHz), p.Reason)
	if len(p.Below) > 0 {
		text += " Below, " + breakText(p.Below) + "."
	}
	if len(p.Above) > 0 {
		text += " Above, " + breakText(p.Above) + "."
	}
	return text
}

// fileRate says how the rate of the file stands to the window.
func (j *rateJob) fileRate() string {
	for _, c := range j.r.Candidates {
		if c.Map != j.r.Map || math.Abs(c.RateHz-j.r.FileRateHz) > toldApart*c.RateHz {
			continue
		}
		rate := hertzText(j.r.FileRateHz)
		if c.Meets {
			return " The file's rate, " + rate + ", is one of them."
		}
		return " The file's rate, " + rate + ", is not: " + strings.Join(quoted(c.Fails), ", ") + "."
	}
	return ""
}

func quoted(list []string) []string {
	out := make([]string, len(list))
	for i, s := range list {
		out[i] = strconv.Quote(s)
	}
	return out
}

// breakText says what breaks first and what next.
func breakText(list []Break) string {
	b := list[0]
	text := fmt.Sprintf("%q breaks first, at %s (%s the pick)", b.Requirement, hertzText(b.RateHz), timesText(b.Factor))
	for _, n := range list[1:] {
		if ratio := n.RateHz / b.RateHz; ratio > 1+sameBound || ratio < 1-sameBound {
			return text + fmt.Sprintf(", then %q at %s (%s)", n.Requirement, hertzText(n.RateHz), timesText(n.Factor))
		}
	}
	return text
}

// timesText writes a ratio: "0.53 times", "64.5 times".
func timesText(f float64) string { return fmt.Sprintf("%.3g times", f) }
