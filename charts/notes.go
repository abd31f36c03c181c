package charts

import (
	"strings"

	"steadytick/study"
)

// notes finds the warning that explains a figure that is not applicable.
type notes []study.Warning

// explain returns the number of the warning (from 1; 0 for none) and the reason in words for the
// missing figure at the path in the column. A warning explains a figure when its code or its text
// contains the figure's JSON name without the unit ("delay_margin", "delay margin") and it does not
// speak of the other column alone; in an unstable column, a warning of instability does.
func (n notes) explain(column, path string, stable bool) (int, string) {
	name := figureName(path)
	for i, w := range n {
		text := strings.ToLower(w.Code + " " + w.Text)
		if (strings.Contains(text, name) || strings.Contains(text, words(name))) && !aboutOther(text, column) {
			return i + 1, w.Text
		}
	}
	if stable {
		return 0, "not applicable to this loop"
	}
	for i, w := range n {
		text := strings.ToLower(w.Code + " " + w.Text)
		if strings.Contains(text, "unstable") && !aboutOther(text, column) {
			return i + 1, w.Text
		}
	}
	return 0, "not applicable: the " + column + " loop is unstable"
}

// aboutOther tells whether the text names the other column and not this one.
func aboutOther(text, column string) bool {
	other := "sampled"
	if column == other {
		other = "continuous"
	}
	return strings.Contains(text, other) && !strings.Contains(text, column)
}

// figureName is the last name in a path, without its unit.
func figureName(path string) string {
	parts := strings.Split(path, ".")
	name := parts[len(parts)-1]
	for len(parts) > 1 && name != "" && strings.Trim(name, "0123456789") == "" {
		parts = parts[:len(parts)-1]
		name = parts[len(parts)-1]
	}
	for _, u := range []string{"_deg", "_db", "_rad_s", "_percent", "_s"} {
		if short, ok := strings.CutSuffix(name, u); ok {
			return short
		}
	}
	return name
}

// words writes a JSON name as words.
func words(name string) string { return strings.ReplaceAll(name, "_", " ") }
