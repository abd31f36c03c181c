package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/urfave/cli/v2"

	"steadytick/loop"
	"steadytick/study"
)

func gateCommand() *cli.Command {
	return &cli.Command{
		Name:      "gate",
		Usage:     "hold loops to their requirements, or to an earlier revision: exit status, JUnit XML, JSON",
		UsageText: "steadytick gate LOOPFILE… [flags]",
		Description: "Checks that each loop is stable and meets every requirement of its file, at the\n" +
			"file's rate, and says what a failure comes from. What cannot be judged is no\n" +
			"pass. Exit status: 0 all met, 1 something is not met or got worse, 2 a file or\n" +
			"the request is wrong.\n\n" +
			"With --against, every metric is compared with that of an earlier revision of\n" +
			"the one LOOPFILE. It fails where one got worse by more than the tolerance, 1 %\n" +
			"of its value before if not given. Where the value before is 0, the tolerance is\n" +
			"taken of 1 percentage point for overshoot and of 0.001 of the largest reference\n" +
			"for errors; elsewhere any step away from 0 counts. Crossover, bandwidth,\n" +
			"rise_time and samples_per_rise have no better and worse, unless a requirement\n" +
			"of the file bounds them.\n\n" +
			"A met requirement of a linear model is no proof of safety: see the cautions in\nthe README.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "rate", Usage: "sample every LOOPFILE at `RATE` (such as \"4 kHz\") in place of its own rate"},
			&cli.StringFlag{Name: "against", Usage: "compare the one LOOPFILE with the revision before it, in `FILE`"},
			&cli.StringSliceFlag{Name: "tolerance", Usage: "how much worse a metric may get: `PERCENT` such as \"1 %\" for all (the default), \"peak_effort=20 %\" for one; may be repeated"},
			&cli.StringFlag{Name: "junit", Usage: "write the results to `FILE` as JUnit XML"},
			&cli.StringFlag{Name: "json", Usage: "write the results to `FILE` (- for stdout, in place of the lines)"},
		},
		Action: gateAction,
	}
}

// gateRequest is what the command line asks for.
type gateRequest struct {
	files       []string
	rate        string
	against     string
	tolerance   study.Tolerance
	junit, json string
}

func gateAction(c *cli.Context) error {
	req := gateRequest{files: c.Args().Slice(), rate: c.String("rate"), against: c.String("against"), junit: c.String("junit"), json: c.String("json")}
	switch {
	case len(req.files) == 0:
		return requestf("gate needs a loop file: %s", c.Command.UsageText)
	case c.IsSet("against") && len(req.files) > 1:
		return requestf("gate --against takes one loop file; left over: %s", strings.Join(req.files[1:], " "))
	case c.IsSet("tolerance") && !c.IsSet("against"):
		return requestf("--tolerance needs --against FILE")
	case req.junit == "-":
		return requestf("--junit needs a file name")
	}
	if req.rate != "" {
		if _, err := loop.ParseRate(req.rate); err != nil {
			return requestf("--rate: %v", err)
		}
	}
	var err error
	if req.tolerance, err = study.ParseTolerance(c.StringSlice("tolerance")); err != nil {
		return requestf("--tolerance: %v", err)
	}
	return gate(c.Context, c.App.Writer, c.App.ErrWriter, req)
}

// gateFile is a loop file as read: a loop, or what is wrong.
type gateFile struct {
	path string
	loop *loop.Loop
	err  error
}

// gate checks every file, then prints, then writes the files asked for.
func gate(ctx context.Context, stdout, stderr io.Writer, req gateRequest) error {
	list, before, err := req.load()
	if err != nil {
		return err
	}
	result, err := runGate(ctx, stderr, list, before, req)
	if err != nil {
		return err
	}
	if req.json != "-" {
		if err := printGate(stdout, result); err != nil {
			return err
		}
	}
	printGateNotes(stderr, result)
	if err := req.write(stdout, result); err != nil {
		return err
	}
	return gateStatus(result)
}

// load reads every file and sees to it that no output goes over one of them. before is nil without --against.
func (req gateRequest) load() (list []gateFile, before *gateFile, err error) {
	var sources []namedPath
	for _, f := range req.files {
		l, err := loadLoop(f, req.rate, "")
		list = append(list, gateFile{f, l, err})
		sources = append(sources, loopSources(f, l)...)
	}
	if req.against != "" {
		l, err := loadLoop(req.against, "", "")
		before = &gateFile{req.against, l, err}
		for _, s := range loopSources(req.against, l) {
			sources = append(sources, namedPath{s.what + " of --against", s.path})
		}
	}
	return list, before, checkOutputs([]namedPath{{"--junit", req.junit}, {"--json", req.json}}, sources)
}

// runGate checks the files one after the other. A file that cannot be checked is an entry of the result; the error is that of
// an interrupted run.
func runGate(ctx context.Context, stderr io.Writer, list []gateFile, before *gateFile, req gateRequest) (*study.Gate, error) {
	p := newProgress(stderr)
	defer p.clear()
	result := &study.Gate{Schema: study.GateSchema, Met: true}
	for i, f := range list {
		p.step(f.path, i+1, len(list))
		g := f.check(ctx)
		result.Loops = append(result.Loops, g)
		result.Met = result.Met && g.Met
	}
	if before != nil {
		p.step(before.path, 1, 1)
		result.Against = before.compare(ctx, result.Loops[0], req.tolerance)
		result.Met = result.Met && len(result.Against.Worse)+len(result.Against.Problems) == 0
	}
	return result, ctx.Err()
}

// check holds the file to its requirements.
func (f gateFile) check(ctx context.Context) *study.GateLoop {
	err := f.err
	if err == nil {
		var g *study.GateLoop
		if g, err = study.RunGate(ctx, f.loop, study.GateOptions{}); err == nil {
			return g
		}
	}
	return study.GateProblem(f.path, f.problems(err))
}

// compare holds a checked loop against the file, the revision before it.
func (f gateFile) compare(ctx context.Context, now *study.GateLoop, tolerance study.Tolerance) *study.GateAgainst {
	err := f.err
	if err == nil && len(now.Problems) > 0 {
		err = fmt.Errorf("there is nothing to compare with it: %s could not be checked", now.File)
	}
	if err == nil {
		var a *study.GateAgainst
		if a, err = study.RunGateAgainst(ctx, now, f.loop, tolerance, study.GateOptions{}); err == nil {
			return a
		}
	}
	return study.GateAgainstProblem(f.path, f.problems(err))
}

// problems are the texts of what is wrong with the file, each with its place.
func (f gateFile) problems(err error) []string {
	var problems loop.Problems
	if !errors.As(err, &problems) {
		return []string{fmt.Sprintf("%s: %v", f.path, err)}
	}
	texts := make([]string, len(problems))
	for i, p := range problems {
		texts[i] = loop.Problems{p}.Error()
	}
	return texts
}

// write writes the files asked for.
func (req gateRequest) write(stdout io.Writer, result *study.Gate) error {
	if err := writeJSON(stdout, req.json, result); err != nil {
		return err
	}
	if req.junit == "" {
		return nil
	}
	return writeTo(stdout, req.junit, func(w io.Writer) error { return writeJUnit(w, result) })
}

// gateStatus is nil when all is met, errNotMet when something is not, a request error when a file could not be
// checked or compared.
func gateStatus(result *study.Gate) error {
	broken := 0
	for _, g := range result.Loops {
		if len(g.Problems) > 0 {
			broken++
		}
	}
	switch {
	case broken > 0 && len(result.Loops) == 1:
		return requestf("%s could not be checked", result.Loops[0].File)
	case broken > 0:
		return requestf("%d of %d files could not be checked", broken, len(result.Loops))
	case result.Against != nil && len(result.Against.Problems) > 0:
		return requestf("%s could not be compared with %s", result.Loops[0].File, result.Against.File)
	case !result.Met:
		return errNotMet
	}
	return nil
}
