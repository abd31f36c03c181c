package main

import (
	"bytes"
	"context"
	"encoding/xml"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// element is one element of an XML text, as read.
type element struct {
	name     string
	attrs    map[string]string
	text     string
	children []*element
}

// readXML reads an XML text into elements; strict, so that a character that XML 1.0 forbids is an error.
func readXML(t *testing.T, text []byte) *element {
	t.Helper()
	d := xml.NewDecoder(bytes.NewReader(text))
	root := &element{}
	stack := []*element{root}
	for {
		token, err := d.Token()
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatalf("not XML: %v\n%s", err, text)
		}
		top := stack[len(stack)-1]
		switch v := token.(type) {
		case xml.StartElement:
			e := &element{name: v.Name.Local, attrs: map[string]string{}}
			for _, a := range v.Attr {
				if _, twice := e.attrs[a.Name.Local]; twice {
					t.Errorf("attribute %s twice", a.Name.Local)
				}
				e.attrs[a.Name.Local] = a.Value
			}
			top.children = append(top.children, e)
			stack = append(stack, e)
		case xml.EndElement:
			stack = stack[:len(stack)-1]
		case xml.CharData:
			top.text += string(v)
		}
	}
	if len(root.children) != 1 {
		t.Fatalf("%d root elements", len(root.children))
	}
	return root.children[0]
}

// The schema commonly published for CI systems (from memory), element by element: which attributes each must and may
// have, and its children in order. "*" may come any number of times, "?" once or not at all, "1" exactly once.
var junitSchema = map[string]struct {
	must, may []string
	children  []string // name and count
}{
	"testsuites": {nil, nil, []string{"testsuite*"}},
	"testsuite": {[]string{"name", "tests", "failures", "errors", "time", "timestamp", "hostname", "id", "package"}, nil,
		[]string{"properties1", "testcase*", "system-out1", "system-err1"}},
	"properties": {nil, nil, []string{"property*"}},
	"property":   {[]string{"name", "value"}, nil, nil},
	"testcase":   {[]string{"name", "classname", "time"}, nil, []string{"skipped?", "error?", "failure?"}},
	"error":      {[]string{"type"}, []string{"message"}, nil},
	"failure":    {[]string{"type"}, []string{"message"}, nil},
	"system-out": {nil, nil, nil},
	"system-err": {nil, nil, nil},
}

// checkElement holds an element and all below it to the schema.
func checkElement(t *testing.T, e *element) {
	t.Helper()
	rule, ok := junitSchema[e.name]
	if !ok {
		t.Errorf("the schema has no element %s", e.name)
		return
	}
	for _, a := range rule.must {
		if _, ok := e.attrs[a]; !ok {
			t.Errorf("%s has no attribute %s", e.name, a)
		}
	}
	for a := range e.attrs {
		if !slices.Contains(rule.must, a) && !slices.Contains(rule.may, a) {
			t.Errorf("%s may have no attribute %s", e.name, a)
		}
	}
	if len(e.children) > 0 && strings.TrimSpace(e.text) != "" {
		t.Errorf("%s has text beside its children: %q", e.name, e.text)
	}
	at := 0
	for _, c := range rule.children {
		name, count := c[:len(c)-1], c[len(c)-1]
		n := 0
		for at < len(e.children) && e.children[at].name == name {
			n, at = n+1, at+1
		}
		if count == '1' && n != 1 || count == '?' && n > 1 {
			t.Errorf("%s has %d times %s", e.name, n, name)
		}
	}
	if at < len(e.children) {
		t.Errorf("%s may not stand at this place in %s", e.children[at].name, e.name)
	}
	for _, c := range e.children {
		checkElement(t, c)
	}
}

// checkSuite holds the counts and simple types of a testsuite to its elements.
func checkSuite(t *testing.T, s *element) {
	t.Helper()
	got := map[string]int{}
	for _, c := range s.children {
		if c.name != "testcase" {
			continue
		}
		got["tests"]++
		for _, x := range c.children {
			got[map[string]string{"failure": "failures", "error": "errors"}[x.name]]++
			if x.attrs["type"] == "" || strings.TrimSpace(x.text) == "" {
				t.Errorf("%s of %s says nothing", x.name, c.attrs["name"])
			}
		}
		if len(c.children) > 1 {
			t.Errorf("%s has %d outcomes", c.attrs["name"], len(c.children))
		}
		if c.attrs["name"] == "" || c.attrs["classname"] == "" {
			t.Errorf("a testcase without a name: %v", c.attrs)
		}
	}
	for _, a := range []string{"tests", "failures", "errors"} {
		if s.attrs[a] != strconv.Itoa(got[a]) {
			t.Errorf("%s: %s=%q, the elements are %d", s.attrs["name"], a, s.attrs[a], got[a])
		}
	}
	if v, err := strconv.ParseFloat(s.attrs["time"], 64); err != nil || v < 0 {
		t.Errorf("time %q", s.attrs["time"])
	}
}

// junitOf runs gate with --junit and returns the file.
func junitOf(t *testing.T, want int, files map[string]string, args ...string) []byte {
	t.Helper()
	dir := t.TempDir()
	t.Chdir(dir)
	for name, text := range files {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	var out, errs bytes.Buffer
	line := append(append([]string{"steadytick", "gate"}, args...), "--junit", "out.xml")
	if code := Main(context.Background(), &out, &errs, line); code != want {
		t.Fatalf("status %d, want %d: %s%s", code, want, out.String(), errs.String())
	}
	text, err := os.ReadFile("out.xml")
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// Names that XML must not swallow: markup, the end of a CDATA section, control characters, characters
// outside of XML 1.0, a byte that is no UTF-8.
const oddName = "odd ]]> <loop attr=\\\"1\\\"> & \\u0001 \\u000b \\ufffe \\U0001f600 name"

const oddLoop = `loop: "` + oddName + `"
output: "]]>"
plant: {model: 10/(s*(s + 1))}
controller: {model: 1}
timing: {rate: 20 Hz, compute: 10 ms}
inputs: [ramp: 1]
requirements: [phase_margin >= 15 deg, ramp_error <= 0.05, stuck_error <= 1, delay_margin >= 20 ms]
`

// Loops that pass, fail, cannot be judged, cannot be read and cannot be stable, in one file.
func TestJUnitStructure(t *testing.T) {
	files := map[string]string{
		"odd.yaml":      oddLoop,
		"unsteady.yaml": unsteady,
		"broken.yaml":   "loop: \"]]>\x01\nplant: {model: s^2/(s + 1)}\ntiming: {rate: 1000}\n",
		"fine.yaml":     starters()[0].text,
	}
	text := junitOf(t, exitRequest, files, "odd.yaml", "unsteady.yaml", "broken.yaml", "fine.yaml")
	root := readXML(t, text)
	if root.name != "testsuites" {
		t.Fatalf("the root is %s", root.name)
	}
	checkElement(t, root)
	want := []struct{ name, tests, failures, errors string }{
		{"odd.yaml", "5", "2", "1"}, {"unsteady.yaml", "2", "2", "0"}, {"broken.yaml", "1", "0", "1"}, {"fine.yaml", "4", "0", "0"}}
	if len(root.children) != len(want) {
		t.Fatalf("%d suites", len(root.children))
	}
	for i, s := range root.children {
		checkSuite(t, s)
		w := want[i]
		if s.attrs["name"] != w.name || s.attrs["tests"] != w.tests || s.attrs["failures"] != w.failures || s.attrs["errors"] != w.errors || s.attrs["id"] != strconv.Itoa(i) {
			t.Errorf("%v, want %v", s.attrs, w)
		}
	}
	odd := root.children[0]
	if name := odd.children[0].children[1].attrs["value"]; !strings.HasPrefix(name, `odd ]]> <loop attr="1"> & `) || !strings.HasSuffix(name, "😀 name") {
		t.Errorf("the loop's name has become %q", name)
	}
	if failure := odd.children[2].children[0]; failure.name != "failure" || !strings.Contains(failure.attrs["message"], "phase_margin is 11.7897 deg, not >= 15 deg") ||
		!strings.Contains(failure.text, "the largest part by the hold, half a tick") {
		t.Errorf("%s %v %q", failure.name, failure.attrs, failure.text)
	}
	if e := odd.children[4].children[0]; e.name != "error" || e.attrs["type"] != "not judged" {
		t.Errorf("%s %v", e.name, e.attrs)
	}
	if again := junitOf(t, exitRequest, files, "odd.yaml", "unsteady.yaml", "broken.yaml", "fine.yaml"); !bytes.Equal(text, again) {
		t.Error("a second run gives another file")
	}
}

// A comparison is a suite of its own, one case a metric.
func TestJUnitOfAComparison(t *testing.T) {
	files := map[string]string{"now.yaml": oddLoop, "before.yaml": strings.Replace(oddLoop, "20 Hz", "40 Hz", 1)}
	root := readXML(t, junitOf(t, exitNotMet, files, "now.yaml", "--against", "before.yaml"))
	checkElement(t, root)
	if len(root.children) != 2 {
		t.Fatalf("%d suites", len(root.children))
	}
	s := root.children[1]
	checkSuite(t, s)
	if s.attrs["name"] != "now.yaml against before.yaml" || s.attrs["failures"] == "0" {
		t.Errorf("%v", s.attrs)
	}
	for _, c := range s.children {
		if c.attrs["name"] == "phase_margin" && (len(c.children) != 1 || !strings.Contains(c.children[0].attrs["message"], "phase_margin was ")) {
			t.Errorf("phase margin: %+v", c.children)
		}
		if c.attrs["name"] == "velocity_constant" && len(c.children) != 0 {
			t.Errorf("velocity constant: %+v", c.children[0].attrs)
		}
	}
}

// The checker itself sees what is wrong.
func TestJUnitCheckerSees(t *testing.T) {
	for _, wrong := range []string{
		`<testsuite name="a"/>`,
		`<testcase name="a" time="0"/>`,
		`<testcase name="a" classname="b" time="0"><failure type="x"/><error type="x"/></testcase>`,
		`<failure message="x"/>`,
		`<properties>x<property name="a" value="b"/></properties>`,
		`<testsuites><system-out/></testsuites>`,
	} {
		inner := &testing.T{}
		checkElement(inner, readXML(t, []byte(wrong)))
		if !inner.Failed() {
			t.Errorf("%s passes", wrong)
		}
	}
}
