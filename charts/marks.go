package charts

import (
	"math"

	echarts "github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"
)

// mark is a line across the chart with a word to it: above the chart for an x value, on the line for a
// y value.
type mark struct {
	onX  bool
	at   float64
	text string
}

// markOptions draws the marks on a series of their own, which no key hides.
func (c chart) markOptions() echarts.SeriesOpts {
	return func(o *echarts.SingleSeries) {
		o.Data = []int{}
		o.Symbol = "none"
		if len(c.marks) == 0 {
			return
		}
		lines := &opts.MarkLines{}
		lines.Symbol = []string{"none", "none"}
		for _, m := range c.marks {
			lines.Data = append(lines.Data, c.mark(m))
		}
		o.MarkLines = lines
	}
}

func (c chart) mark(m mark) object {
	label := object{"show": true, "formatter": "{b}", "position": "insideStartTop", "color": textColor,
		"fontSize": fontSize, "distance": 4}
	o := object{"name": m.text, "label": label,
		"lineStyle": object{"color": axisColor, "width": 1.2, "type": []int{7, 3, 2, 3}}}
	if !m.onX {
		label["backgroundColor"], label["padding"] = "rgba(255,255,255,0.85)", []int{1, 3}
		o["yAxis"] = m.at
		return o
	}
	o["xAxis"] = m.at
	label["position"], label["align"] = "end", c.x.alignAt(m.at)
	if c.y.categories != nil { // counted from the top
		label["position"] = "start"
	}
	return o
}

// alignAt keeps a word above the place v inside the picture.
func (a axis) alignAt(v float64) string {
	if a.min == nil || a.max == nil {
		return "center"
	}
	low, high := *a.min, *a.max
	if a.log {
		low, high, v = math.Log(low), math.Log(high), math.Log(v)
	}
	switch f := (v - low) / (high - low); {
	case f < 0.2:
		return "left"
	case f > 0.8:
		return "right"
	}
	return "center"
}
