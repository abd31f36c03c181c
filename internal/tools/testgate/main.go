// Command testgate reads the output of go test -json on its standard input, shows what
// failed or was skipped, and ends with one line alone:
//
//	N passed, N failed, N skipped
//
// It exits 0 only when at least one test passed and none failed or was skipped: a
// test that did not run must not count as passed. A package that does not build or dies
// outside a test counts as one failed test. Tests and subtests both count.
package main

import (
	"bufio"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"os"
	"sort"
	"strings"
)

func main() {
	summary := flag.String("summary", "", "also write the closing line to this `file`")
	flag.Parse()
	os.Exit(run(os.Stdin, os.Stdout, os.Stderr, *summary))
}

func run(in io.Reader, out, errs io.Writer, summary string) int {
	g := newGate(out)
	if err := g.read(in); err != nil {
		fmt.Fprintf(errs, "testgate: %v\n", err)
		return 1
	}
	g.report()
	line := g.line()
	fmt.Fprintln(out, line)
	if summary != "" {
		if err := os.WriteFile(summary, []byte(line+"\n"), 0o666); err != nil {
			fmt.Fprintf(errs, "testgate: %v\n", err)
			return 1
		}
	}
	if !g.good() {
		return 1
	}
	return 0
}

// event is one line of go test -json (go doc test2json; build events: go help buildjson).
type event struct {
	Action     string
	Package    string
	ImportPath string // build events
	Test       string
	Output     string
	Elapsed    float64
}

type key struct{ pkg, test string }

type gate struct {
	out                     io.Writer
	passed, failed, skipped int
	output                  map[key][]string // of what has not passed yet
	failedIn                map[string]int   // failed tests of a package
	bad                     []key            // failed or skipped, in order of arrival
	build                   []string
}

func newGate(out io.Writer) *gate {
	return &gate{out: out, output: map[key][]string{}, failedIn: map[string]int{}}
}

func (g *gate) read(in io.Reader) error {
	s := bufio.NewScanner(in)
	s.Buffer(nil, 64<<20) // a test may print a long line
	for s.Scan() {
		if len(s.Bytes()) == 0 {
			continue
		}
		var e event
		if err := json.Unmarshal(s.Bytes(), &e); err != nil {
			// not an event: a message of the go command itself; show it
			fmt.Fprintln(g.out, s.Text())
			continue
		}
		g.take(e)
	}
	return s.Err()
}

func (g *gate) take(e event) {
	k := key{e.Package, e.Test}
	switch e.Action {
	case "output":
		g.output[k] = append(g.output[k], e.Output)
	case "build-output":
		g.build = append(g.build, e.Output)
	case "build-fail":
		g.build = append(g.build, "build failed: "+e.ImportPath+"\n")
	case "pass":
		delete(g.output, k)
		if e.Test != "" {
			g.passed++
			return
		}
		fmt.Fprintf(g.out, "ok    %s  %.1f s\n", e.Package, e.Elapsed)
	case "fail":
		if e.Test != "" {
			g.failed++
			g.failedIn[e.Package]++
			g.bad = append(g.bad, k)
			return
		}
		fmt.Fprintf(g.out, "FAIL  %s  %.1f s\n", e.Package, e.Elapsed)
		if g.failedIn[e.Package] == 0 { // it did not build, or died outside a test
			g.failed++
			g.bad = append(g.bad, k)
		}
	case "skip":
		if e.Test == "" { // a package without tests
			delete(g.output, k)
			return
		}
		g.skipped++
		g.bad = append(g.bad, k)
	}
}

// report prints what failed and what was skipped, with its output.
func (g *gate) report() {
	for _, line := range g.build {
		fmt.Fprint(g.out, line)
	}
	for _, k := range g.bad {
		fmt.Fprintf(g.out, "\n--- %s\n%s", strings.TrimSpace(k.pkg+" "+k.test), strings.Join(g.output[k], ""))
		delete(g.output, k)
	}
	// Output of a test without an end: the package died under it.
	var open []key
	for k := range g.output {
		if k.test != "" && g.failedIn[k.pkg] == 0 {
			open = append(open, k)
		}
	}
	sort.Slice(open, func(i, j int) bool {
		return open[i].pkg+open[i].test < open[j].pkg+open[j].test
	})
	for _, k := range open {
		fmt.Fprintf(g.out, "\n--- %s %s did not end\n%s", k.pkg, k.test, strings.Join(g.output[k], ""))
	}
}

func (g *gate) line() string {
	return fmt.Sprintf("%d passed, %d failed, %d skipped", g.passed, g.failed, g.skipped)
}

func (g *gate) good() bool { return g.passed > 0 && g.failed == 0 && g.skipped == 0 }
