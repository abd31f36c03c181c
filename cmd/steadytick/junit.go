package main

import (
	"encoding/xml"
	"fmt"
	"io"
	"strings"

	"steadytick/study"
)

// The elements of JUnit XML, in the order that the schema commonly published for CI systems asks for (from
// memory):
//
//	testsuites
//	  testsuite    name tests failures errors time timestamp hostname id package
//	    properties
//	      property name value
//	    testcase   name classname time, then skipped, error or failure with type and message
//	    system-out
//	    system-err
//
// Stricter forms of it require timestamp and hostname, and allow no attributes of testsuites. A check of
// a model has no duration and no date worth keeping, so these are constants and the file is the same from run
// to run.
const (
	junitTime      = "0"
	junitTimestamp = "1970-01-01T00:00:00"
	junitHost      = "localhost"
)

type junitSuites struct {
	XMLName xml.Name     `xml:"testsuites"`
	Suites  []junitSuite `xml:"testsuite"`
}

type junitSuite struct {
	Name       string          `xml:"name,attr"`
	Tests      int             `xml:"tests,attr"`
	Failures   int             `xml:"failures,attr"`
	Errors     int             `xml:"errors,attr"`
	Time       string          `xml:"time,attr"`
	Timestamp  string          `xml:"timestamp,attr"`
	Hostname   string          `xml:"hostname,attr"`
	ID         int             `xml:"id,attr"`
	Package    string          `xml:"package,attr"`
	Properties []junitProperty `xml:"properties>property"`
	Cases      []junitCase     `xml:"testcase"`
	Out        junitText       `xml:"system-out"`
	Err        junitText       `xml:"system-err"`
}

type junitProperty struct {
	Name  string `xml:"name,attr"`
	Value string `xml:"value,attr"`
}

type junitCase struct {
	Name      string        `xml:"name,attr"`
	Classname string        `xml:"classname,attr"`
	Time      string        `xml:"time,attr"`
	Error     *junitMessage `xml:"error"`
	Failure   *junitMessage `xml:"failure"`
}

type junitMessage struct {
	Type    string `xml:"type,attr"`
	Message string `xml:"message,attr"`
	Text    string `xml:",cdata"`
}

// junitText is text of several lines, kept readable in the file.
type junitText struct {
	Text string `xml:",cdata"`
}

// xmlText replaces what no XML text may hold (Extensible Markup Language 1.0, production Char; from memory);
// the encoder does so in attributes but not in CDATA.
func xmlText(s string) string {
	return strings.Map(func(c rune) rune {
		switch {
		case c == '\t' || c == '\n' || c >= 0x20 && c <= 0xd7ff || c >= 0xe000 && c <= 0xfffd || c >= 0x10000:
			return c
		}
		return '\ufffd'
	}, s)
}

// writeJUnit writes one testsuite a file, one testcase a requirement; a requirement that cannot be judged and a
// file that cannot be checked are errors. A comparison is a further testsuite, one testcase a metric.
func writeJUnit(w io.Writer, result *study.Gate) error {
	var all junitSuites
	for _, g := range result.Loops {
		all.Suites = append(all.Suites, loopSuite(g))
	}
	if result.Against != nil {
		all.Suites = append(all.Suites, againstSuite(result))
	}
	for i := range all.Suites {
		all.Suites[i].finish(i)
	}
	if _, err := io.WriteString(w, xml.Header); err != nil {
		return err
	}
	e := xml.NewEncoder(w)
	e.Indent("", "  ")
	if err := e.Encode(all); err != nil {
		return err
	}
	_, err := io.WriteString(w, "\n")
	return err
}

// finish fills in what is the same everywhere and counts.
func (s *junitSuite) finish(id int) {
	s.ID, s.Package, s.Time, s.Timestamp, s.Hostname = id, "steadytick", junitTime, junitTimestamp, junitHost
	s.Tests = len(s.Cases)
	for i := range s.Cases {
		c := &s.Cases[i]
		c.Classname, c.Time = s.Name, junitTime
		if c.Error != nil {
			s.Errors++
			c.Error.Text = xmlText(c.Error.Text)
		}
		if c.Failure != nil {
			s.Failures++
			c.Failure.Text = xmlText(c.Failure.Text)
		}
	}
	s.Out.Text, s.Err.Text = xmlText(s.Out.Text), xmlText(s.Err.Text)
}

func loopSuite(g *study.GateLoop) junitSuite {
	s := junitSuite{Name: g.File, Properties: []junitProperty{{"file", g.File}}}
	if len(g.Problems) > 0 {
		s.Cases = []junitCase{problemCase("loop file", "the loop file could not be checked", g.Problems)}
		return s
	}
	s.Properties = append(s.Properties, junitProperty{"loop", g.Loop}, junitProperty{"period_s", fmt.Sprint(g.PeriodS.Value)})
	for _, r := range g.Requirements {
		s.Cases = append(s.Cases, requirementCase(r))
	}
	var out, notes strings.Builder
	t := &table{w: &out}
	printGateLoop(t, g, gateWidths(g))
	for _, x := range g.Warnings {
		printWrapped(&notes, "warning: ", x.Text)
	}
	s.Out.Text, s.Err.Text = out.String(), notes.String()
	return s
}

// problemCase is what stands in place of the cases of a file that could not be read.
func problemCase(name, message string, problems []string) junitCase {
	return junitCase{Name: name, Error: &junitMessage{name, message, strings.Join(problems, "\n")}}
}

func requirementCase(r study.GateRequirement) junitCase {
	c := junitCase{Name: r.Requirement}
	switch {
	case r.Met == nil:
		c.Error = &junitMessage{"not judged", "not judged: " + r.NotJudged, r.NotJudged}
	case !*r.Met:
		c.Failure = &junitMessage{"requirement", missedText(r), missedText(r)}
		if r.Cause != nil {
			c.Failure.Text += "\n" + r.Cause.Kind + ": " + r.Cause.Text
		}
	}
	return c
}

// missedText is a missed requirement in one line.
func missedText(r study.GateRequirement) string {
	if r.Name == "stable" {
		return "the sampled loop is unstable"
	}
	text := strings.TrimSpace(fmt.Sprintf("%s is %s %s", r.Name, show(r.Written.In(r.Value)), r.Written.Name))
	text += strings.TrimRight(fmt.Sprintf(", not %s %s %s", r.Op, show(r.Written.In(r.Limit)), r.Written.Name), " ")
	if !r.Slack.OK {
		return text + "; the loop is unstable"
	}
	text += strings.TrimRight(fmt.Sprintf("; slack %s %s", show(r.Written.In(r.Slack)), r.Written.Name), " ")
	if p := percent(r.SlackPercent); p != "" {
		text += fmt.Sprintf(" (%s)", p)
	}
	return text
}

func againstSuite(result *study.Gate) junitSuite {
	a := result.Against
	s := junitSuite{Name: result.Loops[0].File + " against " + a.File, Properties: []junitProperty{
		{"file", result.Loops[0].File}, {"against", a.File}, {"tolerance_percent", fmt.Sprint(a.TolerancePercent)}}}
	if len(a.Problems) > 0 {
		s.Cases = []junitCase{problemCase("comparison", "the revisions could not be compared", a.Problems)}
		return s
	}
	stable := junitCase{Name: "stable"}
	if a.StableBefore && !a.StableAfter {
		stable.Failure = &junitMessage{"worse", "stable before, unstable now", "stable before, unstable now"}
	}
	s.Cases = append(s.Cases, stable)
	for _, c := range a.Changes {
		one := junitCase{Name: c.Name}
		if c.Verdict == study.ChangeWorse {
			text := changeText(c)
			one.Failure = &junitMessage{"worse", text, text}
		}
		s.Cases = append(s.Cases, one)
	}
	var out strings.Builder
	printAgainst(&table{w: &out}, result)
	s.Out.Text = out.String()
	return s
}

// changeText is a metric that got worse, in one line.
func changeText(c study.MetricChange) string {
	text := fmt.Sprintf("%s was %s and is %s %s", c.Name, show(c.Shown.In(c.Before)), show(c.Shown.In(c.After)), c.Shown.Name)
	if p := percent(c.ChangePercent); p != "" {
		text += fmt.Sprintf(" (change %s, %.6g %% is tolerated)", p, c.TolerancePercent)
	}
	if c.Note != "" {
		text += "; " + c.Note
	}
	return strings.TrimSpace(text)
}
