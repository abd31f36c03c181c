package charts

import (
	"encoding/json"
	"fmt"
	"strconv"

	echarts "github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"steadytick/study"
)

// RuntimeAddress is where a report loads the chart runtime when none is embedded: go-echarts' own default.
func RuntimeAddress() string {
	c := echarts.NewLine()
	c.Validate()
	return c.JSAssets.Values[0]
}

// axis is one axis of a chart. Data are in the unit without prefix; labels are divided by scale.
type axis struct {
	quantity   string
	unit       unit
	log        bool
	min, max   *float64 // nil: from the data
	interval   float64  // between ticks, 0: chosen by the library
	categories []string // a row of names in place of numbers
}

func (a axis) name() string {
	switch {
	case a.categories != nil:
		return a.quantity
	case a.unit.name == "":
		return a.quantity + " (–)"
	}
	return a.quantity + " (" + a.unit.name + ")"
}

// chart is one drawing.
type chart struct {
	id, group string
	x, y      axis
	series    []series
	marks     []mark
	zoomY     bool         // a second slider for y
	view      [][2]float64 // first view in x and y; nil: everything
}

// series is a curve with its style.
type series struct {
	curve study.Curve
	style style
	index int  // staggers the symbols along the curves
	gaps  bool // points are pairs, see points.gaps
}

// drawing is a chart as the page's script receives it.
type drawing struct {
	ID     string          `json:"id"`
	Group  string          `json:"group"`
	X      axisNote        `json:"x"`
	Y      axisNote        `json:"y"`
	Option json.RawMessage `json:"option"`
}

// axisNote tells the page's script how to word an axis' numbers.
type axisNote struct {
	Quantity string  `json:"quantity"`
	Unit     string  `json:"unit"`
	Scale    float64 `json:"scale"`
	Log      bool    `json:"log"`
}

func (a axis) note() axisNote {
	return axisNote{Quantity: a.quantity, Unit: a.unit.name, Scale: a.unit.scale, Log: a.log}
}

// draw turns the chart into options. The error is a CurveError or the encoder's.
func (c chart) draw() (drawing, error) {
	line := echarts.NewLine()
	line.SetGlobalOptions(
		echarts.WithInitializationOpts(opts.Initialization{ChartID: c.id, Renderer: "svg"}),
		echarts.WithAnimation(false),
		echarts.WithLegendOpts(opts.Legend{Show: opts.Bool(false)}),
		echarts.WithTooltipOpts(opts.Tooltip{Show: opts.Bool(true), Trigger: "axis",
			BackgroundColor: "#ffffff", BorderColor: "#b9c3ca"}),
		echarts.WithGridOpts(opts.Grid{Left: "6", Right: c.right(), Top: "48", Bottom: "48", ContainLabel: opts.Bool(true)}),
		echarts.WithXAxisOpts(opts.XAxis{Name: c.x.name(), NameLocation: "middle", NameGap: 26, Type: c.x.kind()}),
		echarts.WithYAxisOpts(opts.YAxis{Name: c.y.name(), NameLocation: "end", NameGap: 24, Type: c.y.kind()}),
		echarts.WithDataZoomOpts(opts.DataZoom{Type: "inside"}, opts.DataZoom{Type: "slider"}),
	)
	for _, s := range c.series {
		if err := checkCurve(c.id, s.curve, c.x.log); err != nil {
			return drawing{}, err
		}
		line.AddSeries(s.curve.Name, nil, s.options()...)
	}
	line.AddSeries("", nil, c.markOptions())
	line.Accept(&details{chart: c})
	line.Validate()
	option, err := encode(line.JSON())
	return drawing{ID: c.id, Group: c.group, X: c.x.note(), Y: c.y.note(), Option: option}, err
}

// encode writes JSON in which <, > and & are escaped, so that it can stand in a script element.
func encode(v any) (json.RawMessage, error) {
	text, err := json.Marshal(v)
	if err != nil {
		return nil, fmt.Errorf("chart options: %w", err)
	}
	return text, nil
}

func (c chart) right() string {
	if c.zoomY {
		return "42"
	}
	return "24"
}

func (a axis) kind() string {
	switch {
	case a.categories != nil:
		return "category"
	case a.log:
		return "log"
	}
	return "value"
}

// options are the series' settings that go-echarts has names for; details adds the rest.
func (s series) options() []echarts.SeriesOpts {
	data := points{curve: thin(s.curve, s.limit()), mark: s.style.Symbol, offset: s.index, gaps: s.gaps, thin: s.style.Width < 2}
	return []echarts.SeriesOpts{func(o *echarts.SingleSeries) {
		o.Data = data
		o.Symbol = "none"
		o.ShowSymbol = opts.Bool(true)
		o.ItemStyle = &opts.ItemStyle{Color: s.style.Color}
		switch {
		case s.style.Cross != "":
			o.Type, o.Symbol, o.SymbolSize = "scatter", crossPath[s.style.Cross], crossSize[s.style.Cross]
			data.mark = ""
			o.Data = data
		case s.curve.Dots:
			o.Type, o.Symbol, o.SymbolSize = "scatter", "circle", 4
			data.mark = ""
			o.Data = data
		case s.curve.Step:
			o.Step = "end" // the value stands until the next point
		}
	}}
}

func (s series) limit() int {
	switch {
	case s.gaps || s.style.Cross != "": // no curve, each point counts
		return len(s.curve.X)
	case s.curve.Dots:
		return maxDots
	}
	return maxPoints
}

// marksOnCurve is how many symbols a curve carries.
const marksOnCurve = 7

// points writes a curve as the library's data: [x,y] for a point, an object for one with a symbol.
type points struct {
	curve  study.Curve
	mark   string // symbol, "" for none
	offset int
	gaps   bool // points 0 and 1, 2 and 3, … are joined, with a gap after each pair
	thin   bool // pairs of one place are strokes rather than blocks
}

// MarshalJSON keeps nine digits of x and seven of y: more than the screen shows, half the length.
func (p points) MarshalJSON() ([]byte, error) {
	n := len(p.curve.X)
	out := make([]byte, 0, 24*n+2)
	out = append(out, '[')
	every := max(1, n/marksOnCurve)
	first := every * (1 + p.offset%5) / 6 // a sixth of the spacing further for each curve
	for i := range n {
		if i > 0 {
			out = append(out, ',')
		}
		if p.gaps && i > 0 && i%2 == 0 {
			out = append(out, `["-","-"],`...)
		}
		symbol := p.mark != "" && n > 1 && i%every == first
		alone := p.gaps && p.curve.X[i] == p.curve.X[i^1] // a bar of no length
		switch {
		case symbol:
			out = append(out, `{"symbol":"`+p.mark+`","symbolSize":7,"value":`...)
		case alone:
			size := "[4,11]"
			if p.thin {
				size = "[1.2,12]"
			}
			out = append(out, `{"symbol":"rect","symbolSize":`+size+`,"value":`...)
		}
		out = append(out, '[')
		out = strconv.AppendFloat(out, p.curve.X[i], 'g', 9, 64)
		out = append(out, ',')
		out = strconv.AppendFloat(out, p.curve.Y[i], 'g', 7, 64)
		out = append(out, ']')
		if symbol || alone {
			out = append(out, '}')
		}
	}
	return append(out, ']'), nil
}
