package main

import (
	"context"
	"errors"
	"io"
	"math/big"
	"strconv"

	"github.com/urfave/cli/v2"

	"steadytick/charts"
	"steadytick/loop"
	"steadytick/study"
)

func rateCommand() *cli.Command {
	return &cli.Command{
		Name:      "rate",
		Usage:     "which sample rates can work: the rate window, timer settings, what binds, what to pick",
		UsageText: "steadytick rate LOOPFILE [flags]",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "from", Usage: "slowest `RATE` to look at (such as \"50 Hz\") in place of the file's or the one found"},
			&cli.StringFlag{Name: "to", Usage: "fastest `RATE` to look at"},
			&cli.StringFlag{Name: "map", Usage: "use `MAP` for the controller in place of the file's"},
			&cli.StringFlag{Name: "maps", Usage: "`all`: every controller map side by side"},
			&cli.StringFlag{Name: "points", Usage: "look at `NUMBER` rates to begin with, 10 to 20000 (60 a decade if not given)"},
			&cli.StringFlag{Name: "json", Usage: "write the result to `FILE` (- for stdout, in place of the tables)"},
			&cli.StringFlag{Name: "html", Usage: "write the report to `FILE`"},
		},
		Action: rateAction,
	}
}

// rateRequest is what the flags ask for.
type rateRequest struct {
	json, html string
	options    study.RateOptions
}

func rateAction(c *cli.Context) error {
	file, err := oneFile(c, "loop file")
	if err != nil {
		return err
	}
	req := rateRequest{json: c.String("json"), html: c.String("html")}
	if req.html == "-" {
		return requestf("--html needs a file name")
	}
	if req.options.From, err = rateFlag(c, "from"); err != nil {
		return err
	}
	if req.options.To, err = rateFlag(c, "to"); err != nil {
		return err
	}
	if from, to := req.options.From, req.options.To; from != nil && to != nil && from.Cmp(to) >= 0 {
		return requestf("--from %s is not below --to %s", c.String("from"), c.String("to"))
	}
	if m := c.String("maps"); m != "" && m != "all" {
		return requestf("--maps %s: the only choice is all; --map takes one map", m)
	}
	req.options.AllMaps = c.String("maps") == "all"
	if text := c.String("points"); text != "" {
		n, err := strconv.Atoi(text)
		if err != nil || n < 10 || n > 20_000 {
			return requestf("--points wants a whole number from 10 to 20000; got %q", text)
		}
		req.options.Points = n
	}
	l, err := loadLoop(file, "", c.String("map"))
	if err != nil {
		return err
	}
	outputs := []namedPath{{"--json", req.json}, {"--html", req.html}}
	if err := checkOutputs(outputs, loopSources(file, l)); err != nil {
		return err
	}
	return rate(c.Context, c.App.Writer, c.App.ErrWriter, l, req)
}

// rateFlag reads a rate, Hz; nil for a flag that is not given.
func rateFlag(c *cli.Context, name string) (*big.Rat, error) {
	text := c.String(name)
	if text == "" {
		return nil, nil
	}
	period, err := loop.ParseRate(text)
	if err != nil {
		return nil, requestf("--%s: %v", name, err)
	}
	return period.Inv(period), nil
}

func rate(ctx context.Context, stdout, stderr io.Writer, l *loop.Loop, req rateRequest) error {
	p := newProgress(stderr)
	defer p.clear()
	req.options.Progress = p.step
	req.options.Curves = req.html != ""
	req.options.Version = versionText()
	result, err := study.RunRate(ctx, l, req.options)
	if errors.Is(err, study.ErrDigitalRate) {
		return requestf("%v", err)
	}
	if err != nil {
		return err
	}
	p.clear()
	if req.json != "-" {
		if err := printRate(stdout, result); err != nil {
			return err
		}
	}
	for _, w := range result.Warnings {
		printWrapped(stderr, "warning: ", w.Text)
	}
	if err := writeJSON(stdout, req.json, result); err != nil {
		return err
	}
	return writeReport(stdout, stderr, req.html, req.json == "-", func(w io.Writer) error { return charts.RateReport(w, result) })
}
