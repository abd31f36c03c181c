package loop

import (
	"strings"
	"testing"
)

// The pointer stands under the place: as many columns before it as the text before the
// place takes on a terminal.
func TestExcerpt(t *testing.T) {
	for _, c := range []struct {
		line          string
		column        int
		text, pointer string
	}{
		{"model: 1/2s", 9, "model: 1/2s", "        ^"},
		{"a:\tb", 4, "a:    b", "      ^"},
		{"列車: x", 5, "列車: x", "      ^"},
		{"é́x", 3, "é́x", " ^"},                 // e, combining accent, x
		{"", 1, "", "^"},                        // beside nothing
		{"ab", 9, "ab", "  ^"},                  // behind the end
		{"a\x1b[31mb", 2, "a\ufffd[31mb", " ^"}, // no escape reaches a terminal
	} {
		text, pointer := excerpt(c.line, c.column)
		if text != c.text || pointer != c.pointer {
			t.Errorf("%q at %d:\n%q\n%q", c.line, c.column, text, pointer)
		}
	}
	long := strings.Repeat("x", 300) + "!" + strings.Repeat("y", 300)
	text, pointer := excerpt(long, 301)
	if i := strings.Index(pointer, "^"); len(text) > 90 || []rune(text)[i] != '!' {
		t.Errorf("long line: %q\n%q", text, pointer)
	}
}

func TestPrint(t *testing.T) {
	_, problems := Parse("demo.yaml", []byte("loop: demo\nplant: {model: K/(s+1), deadtime: 2}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz}\n"), nil)
	const want = `demo.yaml:2:16: "K" is not defined
    plant: {model: K/(s+1), deadtime: 2}
                   ^
    expected: a symbol of the symbols section, s, z, pi, sqrt() or exp()
demo.yaml:2:25: unknown key "deadtime" in plant
    plant: {model: K/(s+1), deadtime: 2}
                            ^
    expected: one of model, dead_time, friction, backlash
    did you mean "dead_time"?`
	if got := problems.Error(); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestNearest(t *testing.T) {
	keys := []string{"model", "map", "dead_time", "rate", "period", "i", "Kp", "Ti", "kHz", "Hz"}
	for word, want := range map[string]string{
		"modle": "model", "mdel": "model", "deadtime": "dead_time", "DEAD-TIME": "dead_time", "Rate": "rate",
		"perod": "period", "khz": "kHz", "hz": "Hz", "KP": "Kp", "xyzzy": "", "": "", "q": "", "temperature": "",
		strings.Repeat("model", 5000): "",
	} {
		if got := nearest(word, keys); got != want {
			t.Errorf("%.20s: %q, want %q", word, got, want)
		}
	}
}
