package main

import (
	"context"
	"errors"
	"io"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"steadytick/charts"
	"steadytick/loop"
	"steadytick/study"
)

func spreadCommand() *cli.Command {
	return &cli.Command{
		Name:      "spread",
		Usage:     "what is left of the metrics when the symbols are what the supplier delivers: yield, worst cases, sensitivities",
		UsageText: "steadytick spread LOOPFILE [flags]\n   steadytick spread --merge PARTFILE… [LOOPFILE] [flags]",
		Description: "Draws the symbols of the file that have a spread, J: {value: 0.018, spread: 20 %},\n" +
			"and analyses the loop with each draw. The yield is the share of trials that are\n" +
			"stable and meet every requirement.\n\n" +
			"  uniform   every value within the spread alike\n" +
			"  normal    sigma a third of the spread, cut at the spread\n" +
			"  corners   every combination of both ends, of up to 16 symbols\n\n" +
			"Trial K of seed S depends on S and K alone: --trial K runs it by itself, and\n" +
			"--shard I/N runs the I-th of N parts, on other machines as well. --merge makes of\n" +
			"the parts the very bytes of one run.\n\n" +
			"A yield of a linear model is no proof of safety: see the cautions in the README.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "draw", Usage: "`HOW` the symbols are drawn: uniform (if not given), normal or corners"},
			&cli.StringFlag{Name: "trials", Usage: "`NUMBER` of trials, 1 to 1e8 (1000 if not given)"},
			&cli.StringFlag{Name: "seed", Usage: "`NUMBER` that the draws begin from, 0 or more (1 if not given)"},
			&cli.StringFlag{Name: "trial", Usage: "run trial `NUMBER` alone and show its symbols and metrics"},
			&cli.BoolFlag{Name: "simulate", Usage: "overshoot, times, efforts and tracking errors of simulations too; without it only what requirements name"},
			&cli.StringFlag{Name: "yield", Usage: "end with status 1 below a yield of `PERCENT` (such as \"99 %\")"},
			&cli.StringFlag{Name: "rate", Usage: "sample at `RATE` (such as \"4 kHz\") in place of the file's"},
			&cli.StringFlag{Name: "map", Usage: "use `MAP` for the controller in place of the file's"},
			&cli.StringFlag{Name: "shard", Usage: "run `PART` (such as 2/5) of the trials only; needs --out"},
			&cli.StringFlag{Name: "out", Usage: "write the trials to `FILE`, one JSON line each"},
			&cli.BoolFlag{Name: "merge", Usage: "join all parts, given in any order, in place of running trials"},
			&cli.StringFlag{Name: "json", Usage: "write the result to `FILE` (- for stdout, in place of the tables)"},
			&cli.StringFlag{Name: "html", Usage: "write the report to `FILE`"},
		},
		Action: spreadAction,
	}
}

// spreadRequest is what the command line asks for.
type spreadRequest struct {
	json, html, out string
	trial           int64             // 0: all
	shard           *study.SpreadPart // nil: all
	options         study.SpreadOptions
}

func spreadAction(c *cli.Context) error {
	req, err := spreadFlags(c)
	if err != nil {
		return err
	}
	if c.Bool("merge") {
		return spreadMerge(c, req)
	}
	file, err := oneFile(c, "loop file")
	if err != nil {
		return err
	}
	l, err := loadLoop(file, req.options.Rate, req.options.Map)
	if err != nil {
		return err
	}
	if err := checkOutputs(req.outputs(), loopSources(file, l)); err != nil {
		return err
	}
	switch {
	case req.trial > 0:
		return spreadTrial(c, l, req)
	case req.shard != nil:
		return spreadShard(c, l, req)
	}
	return spread(c, req, func(ctx context.Context, o study.SpreadOptions) (*study.Spread, error) {
		return study.RunSpread(ctx, l, o)
	})
}

func (req spreadRequest) outputs() []namedPath {
	return []namedPath{{"--json", req.json}, {"--html", req.html}, {"--out", req.out}}
}

// spreadFlags reads the flags and refuses those that exclude each other.
func spreadFlags(c *cli.Context) (spreadRequest, error) {
	req := spreadRequest{json: c.String("json"), html: c.String("html"), out: c.String("out")}
	o := &req.options
	o.Draw, o.Simulate, o.Rate, o.Map, o.Version = c.String("draw"), c.Bool("simulate"), c.String("rate"), c.String("map"), versionText()
	switch o.Draw {
	case "", study.DrawUniform, study.DrawNormal, study.DrawCorners:
	default:
		return req, requestf("--draw %s: the choices are uniform, normal and corners", o.Draw)
	}
	for name, path := range map[string]string{"html": req.html, "out": req.out} {
		if path == "-" {
			return req, requestf("--%s needs a file name", name)
		}
	}
	var err error
	if o.Trials, err = countFlag(c, "trials", study.MostTrials); err != nil {
		return req, err
	}
	if req.trial, err = countFlag(c, "trial", study.MostTrials); err != nil {
		return req, err
	}
	o.Seed = 1
	if text := c.String("seed"); text != "" {
		if o.Seed, err = strconv.ParseUint(text, 10, 64); err != nil {
			return req, requestf("--seed wants a whole number from 0 to 18446744073709551615; got %q", text)
		}
	}
	if o.Required, err = yieldFlag(c); err != nil {
		return req, err
	}
	if text := c.String("shard"); text != "" {
		p, err := study.ParseSpreadPart(text)
		if err != nil {
			return req, requestf("--shard: %v", err)
		}
		req.shard = &p
	}
	return req, req.clash(c)
}

// clash finds flags that exclude each other.
func (req spreadRequest) clash(c *cli.Context) error {
	for _, x := range []struct {
		flag   string
		others []string
		why    string
	}{
		{"merge", []string{"draw", "trials", "seed", "trial", "simulate", "rate", "map", "shard"}, "the parts hold what they were run with"},
		{"trial", []string{"trials", "shard", "out", "html", "yield"}, "it shows one trial"},
		{"shard", []string{"json", "html", "yield"}, "the result is made of all parts, by --merge"},
	} {
		if !c.IsSet(x.flag) {
			continue
		}
		for _, other := range x.others {
			if c.IsSet(other) {
				return requestf("--%s and --%s exclude each other: %s", x.flag, other, x.why)
			}
		}
	}
	switch {
	case req.shard != nil && req.out == "":
		return requestf("--shard needs --out FILE for the trials of the part")
	case req.options.Draw == study.DrawCorners && c.IsSet("trials"):
		return requestf("--trials has no part in --draw corners: every corner is a trial")
	}
	return nil
}

// countFlag reads a whole number from 1, also as 1e6; 0 for a flag that is not given.
func countFlag(c *cli.Context, name string, most int64) (int64, error) {
	text := c.String(name)
	if text == "" {
		return 0, nil
	}
	v, err := strconv.ParseFloat(strings.ReplaceAll(text, "_", ""), 64)
	if n := int64(v); err == nil && v >= 1 && v <= float64(most) && float64(n) == v {
		return n, nil
	}
	return 0, requestf("--%s wants a whole number from 1 to %d; got %q", name, most, text)
}

// yieldFlag reads a percentage with or without its sign.
func yieldFlag(c *cli.Context) (study.Figure, error) {
	text := c.String("yield")
	if text == "" {
		return study.Figure{}, nil
	}
	v, err := strconv.ParseFloat(strings.TrimSpace(strings.TrimSuffix(strings.TrimSpace(text), "%")), 64)
	if err != nil || !(v >= 0 && v <= 100) {
		return study.Figure{}, requestf("--yield wants a percentage from 0 to 100; got %q", text)
	}
	return study.Fig(v), nil
}

// spread makes the result, with the lines of the trials beside it where they are asked for, and shows it.
func spread(c *cli.Context, req spreadRequest, make func(context.Context, study.SpreadOptions) (*study.Spread, error)) error {
	stdout, stderr := c.App.Writer, c.App.ErrWriter
	p := newProgress(stderr)
	defer p.clear()
	req.options.Progress, req.options.Curves = p.step, req.html != ""
	var result *study.Spread
	run := func(w io.Writer) (err error) {
		req.options.Rows = w
		result, err = make(c.Context, req.options)
		return spreadError(err)
	}
	var err error
	if req.out == "" {
		err = run(nil)
	} else {
		err = writeLines(req.out, run)
	}
	if err != nil {
		return err
	}
	p.clear()
	if err := showSpread(stdout, stderr, req, result); err != nil {
		return err
	}
	if result.Yield.Reached != nil && !*result.Yield.Reached {
		return errNotMet
	}
	return nil
}

func showSpread(stdout, stderr io.Writer, req spreadRequest, result *study.Spread) error {
	if req.json != "-" {
		if err := printSpread(stdout, result); err != nil {
			return err
		}
	}
	for _, w := range result.Warnings {
		printWrapped(stderr, "warning: ", w.Text)
	}
	if err := writeJSON(stdout, req.json, result); err != nil {
		return err
	}
	return writeReport(stdout, stderr, req.html, req.json == "-", func(w io.Writer) error { return charts.SpreadReport(w, result) })
}

// spreadError makes requests of what the loop file or the flags are to blame for.
func spreadError(err error) error {
	if errors.Is(err, study.ErrNoSpread) || errors.Is(err, study.ErrTooManyCorners) {
		return requestf("%v", err)
	}
	return err
}

// spreadTrial runs one trial and shows it.
func spreadTrial(c *cli.Context, l *loop.Loop, req spreadRequest) error {
	t, err := study.RunSpreadTrial(c.Context, l, req.options, req.trial)
	if err != nil {
		return spreadError(err)
	}
	if req.json != "-" {
		if err := printSpreadTrial(c.App.Writer, t); err != nil {
			return err
		}
	}
	return writeJSON(c.App.Writer, req.json, t)
}
