package loop

import (
	"go/parser"
	"go/token"
	"os"
	"regexp"
	"strings"
	"testing"
)

// specBlocks are the indented blocks of the package comment, without their indentation.
func specBlocks(t *testing.T) []string {
	t.Helper()
	src, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	f, err := parser.ParseFile(token.NewFileSet(), "doc.go", src, parser.ParseComments|parser.PackageClauseOnly)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, block := range regexp.MustCompile(`(?m)(?:^(?:\t|  - ).*\n)+`).FindAllString(f.Doc.Text()+"\n", -1) {
		out = append(out, regexp.MustCompile(`(?m)^\t`).ReplaceAllString(block, ""))
	}
	return out
}

// specExamples are the sections of those blocks that are texts of a loop file: a key of the top with what is under it.
func specExamples(t *testing.T) []string {
	t.Helper()
	top := regexp.MustCompile(`^(symbols|plant|sensor|actuator|timer|processor|rate|controller):`)
	var out []string
	for _, block := range specBlocks(t) {
		open := false
		for _, line := range strings.Split(strings.TrimRight(block, "\n"), "\n") {
			switch {
			case top.MatchString(line):
				out, open = append(out, line), true
			case open && strings.HasPrefix(line, " "):
				out[len(out)-1] += "\n" + line
			default:
				open = false
			}
		}
	}
	return out
}

// acceptedExample reads an example with the symbols and the sections that it uses.
func acceptedExample(t *testing.T, text string) {
	t.Helper()
	if !strings.HasPrefix(text, "symbols:") {
		text = "symbols: {Kt: 0.31, J: 0.018, b: 0.09}\n" + text
	}
	if strings.Contains(text, "encoder:") {
		text = "output: rad/s\n" + text
	}
	accepted(t, text)
}

// What the specification shows is what the reader takes.
func TestSpecificationExamples(t *testing.T) {
	examples := specExamples(t)
	if len(examples) < 15 {
		t.Errorf("only %d examples", len(examples))
	}
	for _, text := range examples {
		acceptedExample(t, text)
	}
}

// specTable gives the first columns of the block that has a line beginning with first, comments behind two blanks cut off.
func specTable(t *testing.T, first string) []string {
	t.Helper()
	for _, block := range specBlocks(t) {
		if !strings.Contains("\n"+block, "\n"+first) {
			continue
		}
		var out []string
		for _, line := range strings.Split(strings.TrimRight(block, "\n"), "\n") {
			cell, _, _ := strings.Cut(strings.TrimLeft(line, " "), "  ")
			if cell != "" && !strings.HasPrefix(line, strings.Repeat(" ", 8)) {
				out = append(out, cell)
			}
		}
		return out
	}
	t.Fatalf("no block with %q", first)
	return nil
}

// Every line of the time-line of a tick, every kind of anti-windup and every disturbance of the specification is read.
func TestSpecificationLists(t *testing.T) {
	lines := specTable(t, "timing:")
	if len(lines) != 12 || lines[0] != "timing:" || lines[1] != "rate: 2 kHz" {
		t.Fatalf("%q", lines)
	}
	for _, line := range lines[2:] {
		accepted(t, "timing: {rate: 1 kHz, "+line+"}")
	}
	kinds := specTable(t, "none  ")
	if len(kinds) != 6 {
		t.Errorf("%q", kinds)
	}
	for _, kind := range kinds {
		accepted(t, "controller: {model: 2/s, map: tustin, anti_windup: "+kind+"}\nactuator: {limits: [-1, 1]}")
	}
	for _, section := range []struct {
		first, text string
		count       int
	}{{"  - step:", "inputs:\n", 7}, {"  - sine: {name", "disturbances:\n", 4}} {
		entries := specTable(t, section.first)
		if len(entries) != section.count {
			t.Errorf("%q", entries)
		}
		accepted(t, section.text+"  "+strings.Join(entries, "\n  "))
	}
}
