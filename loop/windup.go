package loop

import "fmt"

// windups are the kinds of anti_windup that are one word.
var windups = []string{"none", "clamp", "stop", "stop_outward"}

// antiWindup reads a word of windups, {clamp: [low, high]} or {tracking_time: …}.
func (r *reader) antiWindup(l *Loop, n *node) {
	if n == nil || n.broken {
		return
	}
	w := &l.Controller.AntiWindup
	forms := list(windups) + ", {clamp: [-10, 10]} or {tracking_time: 50 ms}"
	switch n.kind {
	case textNode:
		if !contains(windups, n.text) {
			r.reportNear(n.at, fmt.Sprintf("%s is not a kind of anti_windup", quote(n.text)), forms, nearest(n.text, windups))
			return
		}
		w.Kind = n.text
		if limits := l.Actuator.Limits; w.Kind == "clamp" && limits != nil {
			w.Clamp = *limits
		}
	case mapNode:
		s, broken := r.section(n, "anti_windup", "clamp", "tracking_time")
		if broken {
			return
		}
		switch s.together("clamp", "tracking_time") {
		case "clamp":
			if span, ok := r.span(s.get("clamp"), "clamp"); ok {
				*w = AntiWindup{Kind: "clamp", Clamp: span}
			}
		case "tracking_time":
			if t, ok := r.positiveSeconds(s.get("tracking_time"), "tracking_time"); ok {
				*w = AntiWindup{Kind: "tracking", TrackingTime: t}
			}
		default:
			s.missing("anti_windup has neither clamp nor tracking_time", forms, "clamp", "tracking_time")
		}
	default:
		r.report(n.at, fmt.Sprintf("anti_windup is %s here", n.kind), forms)
	}
}
