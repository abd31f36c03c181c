package charts

import (
	"fmt"
	"html/template"
	"strings"
)

// style is how a curve looks. Two styles differ in dash or symbol, never in colour alone.
type style struct {
	Color  string
	Dash   []int // lengths of strokes and gaps in pixels, nil for a solid line
	Width  float64
	Symbol string // of the chart library, "" for none
	Cross  string // "+" or "×" for poles, in place of a line
}

// The palette is told apart by people with any kind of colour-blind sight and stands out from white
// (palette_test.go measures both); dash and symbol tell the curves apart without it.
const (
	ink    = "#1d2b36"
	rust   = "#b8420f"
	blue   = "#1f6f9f"
	ochre  = "#c28a14"
	violet = "#7433b0"
	steel  = "#7d95a5"
	grey   = "#8a9298"
)

var (
	referenceStyle  = style{Color: grey, Dash: []int{2, 3}, Width: 1.5}
	continuousStyle = style{Color: ink, Dash: []int{9, 4}, Width: 1.8}
	sampledStyle    = style{Color: rust, Width: 2.6}
)

// furtherStyles go to the other curves in the order of first appearance; after the last they start
// again with the dash pattern of the next.
var furtherStyles = []style{
	{Color: blue, Width: 1.6, Symbol: "emptyCircle"},
	{Color: ochre, Width: 1.6, Symbol: "rect"},
	{Color: violet, Width: 1.6, Symbol: "emptyTriangle"},
	{Color: steel, Width: 1.6, Symbol: "diamond"},
	{Color: blue, Dash: []int{6, 3}, Width: 1.6, Symbol: "emptyRect"},
	{Color: ochre, Dash: []int{6, 3}, Width: 1.6, Symbol: "triangle"},
	{Color: violet, Dash: []int{6, 3}, Width: 1.6, Symbol: "circle"},
	{Color: steel, Dash: []int{6, 3}, Width: 1.6, Symbol: "emptyDiamond"},
	{Color: blue, Dash: []int{2, 3}, Width: 1.6, Symbol: "triangle"},
	{Color: ochre, Dash: []int{2, 3}, Width: 1.6, Symbol: "emptyCircle"},
	{Color: violet, Dash: []int{2, 3}, Width: 1.6, Symbol: "diamond"},
	{Color: steel, Dash: []int{2, 3}, Width: 1.6, Symbol: "rect"},
}

// styles remembers which style each curve name has. The zero value is ready.
type styles struct {
	byName map[string]style
	order  []string
	next   int
}

// of returns the style of the curve name, giving it one at its first appearance.
func (s *styles) of(name string) style {
	if st, ok := s.byName[name]; ok {
		return st
	}
	if s.byName == nil {
		s.byName = map[string]style{}
	}
	st := s.choose(name)
	s.byName[name] = st
	s.order = append(s.order, name)
	return st
}

func (s *styles) choose(name string) style {
	switch {
	case name == "r" || name == "reference":
		return referenceStyle
	case name == "continuous":
		return continuousStyle
	case strings.HasPrefix(name, "sampled"): // "sampled at 2 kHz"
		return sampledStyle
	}
	st := furtherStyles[s.next%len(furtherStyles)]
	s.next++
	return st
}

// ofDots returns the style for dots at the ticks: the colour of the curve whose name begins theirs.
func (s *styles) ofDots(name string) style {
	if st, ok := s.byName[name]; ok {
		return st
	}
	best := ""
	for _, n := range s.order {
		if len(n) > len(best) && strings.HasPrefix(name, n) {
			best = n
		}
	}
	if best != "" {
		return s.byName[best]
	}
	return s.of(name)
}

// level is the layer of a curve: the loop as it will run lies over the variants, and the dashed
// continuous curve over that, so that both show where they agree.
func (st style) level() int {
	switch {
	case st.Width > 2:
		return 3
	case st.Color == ink:
		return 4
	}
	return 2
}

// Crosses for poles: an upright one and a slanted one do not hide each other.
var (
	crossPath = map[string]string{"+": "path://M5,0L5,10M0,5L10,5", "×": "path://M0,0L10,10M10,0L0,10"}
	crossSize = map[string]int{"+": 13, "×": 10}
	crossMark = map[string]string{"+": "M20 1V13M14 7H26", "×": "M15.5 2.5 24.5 11.5M24.5 2.5 15.5 11.5"}
)

// crossed returns the style for poles.
func (st style) crossed(slanted bool) style {
	st.Cross = "+"
	if slanted {
		st.Cross = "×"
	}
	return st
}

// symbolPath draws a symbol in a key, centred on x = 20, y = 7.
func symbolPath(symbol, color string) string {
	fill := color
	name, empty := strings.CutPrefix(symbol, "empty")
	if empty {
		fill, name = "#ffffff", strings.ToLower(name)
	}
	shape := ""
	switch name {
	case "circle":
		shape = `<circle cx="20" cy="7" r="3.4"`
	case "rect":
		shape = `<rect x="16.8" y="3.8" width="6.4" height="6.4"`
	case "triangle":
		shape = `<path d="M20 3.2 23.8 10.2H16.2Z"`
	case "diamond":
		shape = `<path d="M20 2.8 24 7 20 11.2 16 7Z"`
	default:
		return ""
	}
	return fmt.Sprintf(`%s fill="%s" stroke="%s" stroke-width="1.4"/>`, shape, fill, color)
}

// swatch is the picture of a style in a key or table, 40 × 14 pixels. It holds no user text.
func (st style) swatch(dots bool) template.HTML {
	var b strings.Builder
	b.WriteString(`<svg class="swatch" width="40" height="14" viewBox="0 0 40 14" aria-hidden="true">`)
	if st.Cross != "" {
		fmt.Fprintf(&b, `<path d="%s" fill="none" stroke="%s" stroke-width="1.8"/>`, crossMark[st.Cross], st.Color)
	} else if dots {
		for _, x := range []int{8, 20, 32} {
			fmt.Fprintf(&b, `<circle cx="%d" cy="7" r="2.6" fill="%s"/>`, x, st.Color)
		}
	} else {
		dash := strings.Trim(strings.ReplaceAll(fmt.Sprint(st.Dash), " ", ","), "[]")
		fmt.Fprintf(&b, `<path d="M1 7H39" fill="none" stroke="%s" stroke-width="%g" stroke-dasharray="%s"/>`, st.Color, st.Width, dash)
		b.WriteString(symbolPath(st.Symbol, st.Color))
	}
	b.WriteString(`</svg>`)
	return template.HTML(b.String())
}
