package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// The events are as go test -json of Go 1.26 writes them.
func TestGate(t *testing.T) {
	pass := `{"Action":"run","Package":"p","Test":"TestA"}
{"Action":"output","Package":"p","Test":"TestA","Output":"=== RUN TestA\n"}
{"Action":"pass","Package":"p","Test":"TestA","Elapsed":0.1}
{"Action":"pass","Package":"p","Elapsed":0.2}
`
	for _, c := range []struct {
		name, in, line string
		shows          []string
		code           int
	}{
		{"all passed", pass, "1 passed, 0 failed, 0 skipped", []string{"ok    p  0.2 s"}, 0},
		{"nothing ran", "", "0 passed, 0 failed, 0 skipped", nil, 1},
		{"a package without tests", pass + `{"Action":"skip","Package":"q"}`, "1 passed, 0 failed, 0 skipped", nil, 0},
		{"one skipped", pass + `{"Action":"output","Package":"q","Test":"TestB","Output":"no browser\n"}
{"Action":"skip","Package":"q","Test":"TestB"}
{"Action":"pass","Package":"q"}`, "1 passed, 0 failed, 1 skipped", []string{"--- q TestB\nno browser\n"}, 1},
		{"one failed", pass + `{"Action":"output","Package":"q","Test":"TestB/x","Output":"want 1\n"}
{"Action":"fail","Package":"q","Test":"TestB/x"}
{"Action":"fail","Package":"q","Test":"TestB"}
{"Action":"fail","Package":"q"}`, "1 passed, 2 failed, 0 skipped", []string{"--- q TestB/x\nwant 1\n", "FAIL  q"}, 1},
		{"does not build", pass + `{"ImportPath":"q [q.test]","Action":"build-output","Output":"x.go:1: oops\n"}
{"ImportPath":"q [q.test]","Action":"build-fail"}
{"Action":"fail","Package":"q","FailedBuild":"q [q.test]"}`, "1 passed, 1 failed, 0 skipped", []string{"x.go:1: oops", "build failed: q [q.test]"}, 1},
		{"dies under a test", pass + `{"Action":"output","Package":"q","Test":"TestB","Output":"panic: oops\n"}
{"Action":"output","Package":"q","Output":"exit status 2\n"}
{"Action":"fail","Package":"q"}`, "1 passed, 1 failed, 0 skipped", []string{"exit status 2", "q TestB did not end\npanic: oops"}, 1},
		{"words of the go command", "go: no such module\n", "0 passed, 0 failed, 0 skipped", []string{"go: no such module"}, 1},
	} {
		t.Run(c.name, func(t *testing.T) {
			var out, errs strings.Builder
			file := filepath.Join(t.TempDir(), "summary")
			code := run(strings.NewReader(c.in), &out, &errs, file)
			if code != c.code {
				t.Errorf("exit status %d, want %d", code, c.code)
			}
			if !strings.HasSuffix("\n"+out.String(), "\n"+c.line+"\n") {
				t.Errorf("ends with %q, want %q alone on the last line", out.String(), c.line)
			}
			for _, s := range c.shows {
				if !strings.Contains(out.String(), s) {
					t.Errorf("%q is not in\n%s", s, out.String())
				}
			}
			if got, _ := os.ReadFile(file); string(got) != c.line+"\n" {
				t.Errorf("the summary file holds %q", got)
			}
		})
	}
}
