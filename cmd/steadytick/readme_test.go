package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

// readmeScript turns the console blocks of the README into one script that
// expects what they show.
func readmeScript(t *testing.T, text string) string {
	t.Helper()
	var script, files strings.Builder
	blocks := strings.Split(text, "```console\n")[1:]
	for i, b := range blocks {
		b, _, ok := strings.Cut(b, "```")
		if !ok {
			t.Fatal("a console block does not end")
		}
		command, output, _ := strings.Cut(b, "\n")
		command, ok = strings.CutPrefix(command, "$ ")
		if !ok || strings.Contains(output, "\n$ ") {
			t.Fatalf("block %d: one command a block, after \"$ \"", i+1)
		}
		fmt.Fprintf(&script, "exec sh -c '%s'\ncmp stdout want%d\n", strings.ReplaceAll(command, "'", "''"), i)
		fmt.Fprintf(&files, "-- want%d --\n%s", i, output)
	}
	if len(blocks) < 3 {
		t.Fatalf("%d console blocks; there were more", len(blocks))
	}
	return script.String() + files.String()
}

// The commands in the README print what it shows.
func TestReadme(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "readme.txtar")
	if err := os.WriteFile(path, []byte(readmeScript(t, string(text))), 0o644); err != nil {
		t.Fatal(err)
	}
	testscript.Run(t, testscript.Params{Files: []string{path}, RequireExplicitExec: true})
}

// The loop file shown is the starter, to the letter.
func TestReadmeShowsTheStarter(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range starters() {
		if s.name == "converter" && !strings.Contains(string(text), "```yaml\n"+strings.TrimRight(s.text, "\n")+"\n```") {
			t.Error("the YAML block of the README is not the converter starter")
		}
	}
}
