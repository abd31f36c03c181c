package main

import (
	"context"
	"encoding/json"
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

// load reads every file and sees to it that no output goes over one of them.
func (req gateRequest) load() (list []gateFile, before *loop.Loop, err error) {
	var sources []namedPath
	for _, f := range req.files {
		l, err := loadLoop(f, req.rate, "")
		list = append(list, gateFile{f, l, err})
		sources = append(sources, loopSources(f, l)...)
	}
	if req.against != "" {
		if before, err = loadLoop(req.against, "", ""); err != nil {
			return nil, nil, err
		}
		for _, s := range loopSources(req.against, before) {
			sources = append(sources, namedPath{s.what + " of --against", s.path})
		}
	}
	return list, before, checkOutputs([]namedPath{{"--junit", req.junit}, {"--json", req.json}}, sources)
}

// runGate checks the files one after the other. A file that cannot be checked is an entry of the result, not an error.
func runGate(ctx context.Context, stderr io.Writer, list []gateFile, before *loop.Loop, req gateRequest) (*study.Gate, error) {
	p := newProgress(stderr)
	defer p.clear()
	result := &study.Gate{Schema: study.GateSchema, Met: true}
	for i, f := range list {
		p.step(f.path, i+1, len(list))
		g, err := checkFile(ctx, f)
		if err != nil {
			return nil, err
		}
		result.Loops = append(result.Loops, g)
		result.Met = result.Met && g.Met
	}
	if before == nil || len(result.Loops[0].Problems) > 0 {
		return result, ctx.Err()
	}
	p.step(before.File, 1, 1)
	var err error
	if result.Against, err = study.RunGateAgainst(ctx, result.Loops[0], before, req.tolerance, study.GateOptions{}); err != nil {
		return nil, err
	}
	result.Met = result.Met && len(result.Against.Worse) == 0
	return result, ctx.Err()
}

// checkFile checks one file. The error is that of an interrupted run.
func checkFile(ctx context.Context, f gateFile) (*study.GateLoop, error) {
	err := f.err
	if err == nil {
		var g *study.GateLoop
		if g, err = study.RunGate(ctx, f.loop, study.GateOptions{}); err == nil {
			return g, nil
		}
	}
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	var problems loop.Problems
	if !errors.As(err, &problems) {
		return study.GateProblem(f.path, []string{fmt.Sprintf("%s: %v", f.path, err)}), nil
	}
	texts := make([]string, len(problems))
	for i, p := range problems {
		texts[i] = loop.Problems{p}.Error()
	}
	return study.GateProblem(f.path, texts), nil
}

// write writes the files asked for.
func (req gateRequest) write(stdout io.Writer, result *study.Gate) error {
	if req.json != "" {
		err := writeTo(stdout, req.json, func(w io.Writer) error {
			e := json.NewEncoder(w)
			e.SetEscapeHTML(false)
			e.SetIndent("", "  ")
			return e.Encode(result)
		})
		if err != nil {
			return err
		}
	}
	if req.junit == "" {
		return nil
	}
	return writeTo(stdout, req.junit, func(w io.Writer) error { return writeJUnit(w, result) })
}

// gateStatus is nil when all is met, errNotMet when something is not, a request error when a file could not be
// checked.
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
	case !result.Met:
		return errNotMet
	}
	return nil
}
