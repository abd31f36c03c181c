package charts

import (
	"strconv"

	echarts "github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"
)

// details adds to a chart what ECharts can do and go-echarts has no field for.
type details struct {
	echarts.BaseConfigurationVisitor
	chart chart
}

const (
	textColor = "#26333d"
	axisColor = "#5c6b76"
	gridColor = "#e4e9ec"
	fontSize  = 12
)

type object = map[string]any

// seriesOption is a series with a dash pattern; its outer fields win over the embedded ones in the JSON.
type seriesOption struct {
	echarts.SingleSeries
	LineStyle any    `json:"lineStyle,omitempty"`
	ItemStyle any    `json:"itemStyle,omitempty"`
	Emphasis  object `json:"emphasis"`
	Silent    bool   `json:"silent,omitempty"`
	Z         int    `json:"z,omitempty"`
}

// VisitSeriesOpt implements echarts.ConfigurationVisitor.
func (d *details) VisitSeriesOpt(all echarts.MultiSeries) any {
	out := make([]seriesOption, len(all))
	for i, s := range all {
		out[i] = seriesOption{SingleSeries: s, Emphasis: object{"disabled": true}}
		if i >= len(d.chart.series) { // the marks
			out[i].Silent = true
			continue
		}
		st := d.chart.series[i].style
		var dash any = "solid"
		if st.Dash != nil {
			dash = st.Dash
		}
		out[i].LineStyle = object{"color": st.Color, "width": st.Width, "type": dash, "cap": "butt"}
		out[i].ItemStyle = object{"color": st.Color, "borderColor": st.Color, "borderWidth": 1.4}
		out[i].Z = st.level()
		if st.Cross != "" {
			out[i].ItemStyle = object{"color": "transparent", "borderColor": st.Color, "borderWidth": 1.8}
		} else if s.Type == "scatter" {
			out[i].ItemStyle = object{"color": st.Color, "borderWidth": 0}
		}
	}
	return out
}

// VisitXAxis implements echarts.ConfigurationVisitor.
func (d *details) VisitXAxis(all []opts.XAxis) any {
	a := axisOption(d.chart.x, all[0].Name, all[0].Type)
	a["nameLocation"], a["nameGap"] = all[0].NameLocation, all[0].NameGap
	return []object{a}
}

// VisitYAxis implements echarts.ConfigurationVisitor.
func (d *details) VisitYAxis(all []opts.YAxis) any {
	a := axisOption(d.chart.y, all[0].Name, all[0].Type)
	a["nameLocation"], a["nameGap"] = all[0].NameLocation, all[0].NameGap
	if d.chart.y.categories != nil { // counted from the top
		a["nameLocation"] = "start"
	}
	a["nameTextStyle"] = object{"align": "left", "color": textColor, "fontSize": fontSize, "padding": []int{0, 0, 0, -4}}
	a["axisLine"] = object{"show": true, "onZero": false, "lineStyle": object{"color": axisColor}}
	return []object{a}
}

func axisOption(a axis, name, kind string) object {
	o := object{
		"name": name, "type": kind,
		"nameTextStyle": object{"color": textColor, "fontSize": fontSize},
		"axisLine":      object{"show": true, "onZero": false, "lineStyle": object{"color": axisColor}},
		"axisTick":      object{"show": true},
		"axisLabel":     object{"color": textColor, "fontSize": fontSize, "hideOverlap": true},
		"splitLine":     object{"show": true, "lineStyle": object{"color": gridColor}},
		"splitNumber":   5,
	}
	if a.max != nil && !a.log && shortNumber(*a.max/a.unit.scale) != *a.max/a.unit.scale {
		o["axisLabel"].(object)["showMaxLabel"] = false // an end like 1.716 between ticks at 0.3
	}
	if a.min != nil {
		o["min"] = *a.min
	}
	if a.max != nil {
		o["max"] = *a.max
	}
	if a.interval > 0 {
		o["interval"] = a.interval
	}
	if a.categories != nil {
		o["data"], o["inverse"] = a.categories, true
		o["axisLabel"] = object{"color": textColor, "fontSize": fontSize, "width": 190, "overflow": "truncate", "interval": 0}
		o["splitLine"] = object{"show": false}
		o["axisTick"] = object{"show": false}
	}
	return o
}

// shortNumber rounds v to two significant digits.
func shortNumber(v float64) float64 {
	short, _ := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 2, 64), 64)
	return short
}

// VisitGrid implements echarts.ConfigurationVisitor.
func (d *details) VisitGrid(all []opts.Grid) any { return all }

// VisitTooltipOpt implements echarts.ConfigurationVisitor.
func (d *details) VisitTooltipOpt(t opts.Tooltip) any {
	return object{"show": t.Show, "trigger": t.Trigger, "confine": true, "transitionDuration": 0,
		"backgroundColor": t.BackgroundColor, "borderColor": t.BorderColor,
		"textStyle":   object{"color": textColor, "fontSize": fontSize},
		"axisPointer": object{"type": "line", "lineStyle": object{"color": axisColor, "type": "solid"}}}
}

// VisitToolbox implements echarts.ConfigurationVisitor.
func (d *details) VisitToolbox(opts.Toolbox) any {
	features := object{}
	if d.chart.y.categories == nil {
		features["dataZoom"] = object{"filterMode": "none", "title": object{"zoom": "zoom into a rectangle", "back": "one zoom back"}}
	}
	features["restore"] = object{"title": "whole view"}
	features["saveAsImage"] = object{"type": "svg", "name": d.chart.id, "title": "save as SVG"}
	return object{"show": true, "right": 10, "top": 0, "itemSize": 13, "itemGap": 10, "feature": features,
		"iconStyle": object{"borderColor": axisColor}, "emphasis": object{"iconStyle": object{"borderColor": textColor}}}
}

// VisitDataZooms implements echarts.ConfigurationVisitor: the wheel zooms with the control key only, so
// that it goes on scrolling the page, and nothing outside the window is dropped from a curve.
func (d *details) VisitDataZooms([]opts.DataZoom) any {
	zooms := []object{d.inside("xAxisIndex", 0), d.slider("xAxisIndex", 0)}
	if d.chart.zoomY {
		zooms = append(zooms, d.inside("yAxisIndex", 1), d.slider("yAxisIndex", 1))
	}
	return zooms
}

func (d *details) inside(index string, which int) object {
	return d.window(which, object{"type": "inside", index: 0, "filterMode": "none", "zoomOnMouseWheel": "ctrl", "moveOnMouseWheel": false})
}

func (d *details) slider(index string, which int) object {
	o := object{"type": "slider", index: 0, "filterMode": "none", "showDetail": false, "showDataShadow": false,
		"brushSelect": false, "borderColor": "#ccd4d9", "fillerColor": "rgba(93,120,138,0.16)",
		"handleStyle": object{"color": "#ffffff", "borderColor": axisColor}, "moveHandleSize": 0}
	if index == "yAxisIndex" {
		o["orient"], o["width"], o["right"] = "vertical", 14, 4
	} else {
		o["height"], o["bottom"] = 14, 4
	}
	return d.window(which, o)
}

// window sets the first view of a zoom.
func (d *details) window(which int, o object) object {
	if d.chart.view != nil {
		o["startValue"], o["endValue"] = d.chart.view[which][0], d.chart.view[which][1]
	}
	return o
}
