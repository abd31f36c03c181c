package main

import (
	"context"
	"fmt"
	"io"
	"strconv"

	"github.com/urfave/cli/v2"

	"steadytick/charts"
	"steadytick/loop"
	"steadytick/study"
)

func compareCommand() *cli.Command {
	return &cli.Command{
		Name:      "compare",
		Usage:     "continuous against sampled at the loop's rate: constants, errors, margins, transients",
		UsageText: "steadytick compare LOOPFILE [flags]",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "rate", Usage: "sample at `RATE` (such as \"4 kHz\") in place of the file's rate"},
			&cli.StringFlag{Name: "map", Usage: "use `MAP` for the controller: tustin, matched, forward, backward, hold, triangle or \"prewarped at 40 Hz\""},
			&cli.StringSliceFlag{Name: "degrade", Usage: "what the report varies, `LIST` being rates=2,0.5,0.25 (factors of the rate) or delays=none,own,+1 (ticks added); repeat for both, empty list for none"},
			&cli.StringFlag{Name: "json", Usage: "write the result to `FILE` (- for stdout, in place of the tables)"},
			&cli.StringFlag{Name: "csv", Usage: "write the simulation to `FILE` (- for stdout, in place of the tables)"},
			&cli.StringFlag{Name: "csv-input", Usage: "the input that --csv simulates: its `NUMBER` in the file's list, from 1", Value: "1"},
			&cli.StringFlag{Name: "seed", Usage: "`NUMBER` that the noise of the loop as built depends on, from 1", Value: "1"},
			&cli.StringFlag{Name: "html", Usage: "write the report to `FILE`"},
		},
		Action: compareAction,
	}
}

// compareRequest is what the flags ask for.
type compareRequest struct {
	json, csv, html string
	options         study.Options
	csvInput        int
}

func compareAction(c *cli.Context) error {
	file, err := oneFile(c, "loop file")
	if err != nil {
		return err
	}
	req := compareRequest{json: c.String("json"), csv: c.String("csv"), html: c.String("html")}
	if req.json == "-" && req.csv == "-" {
		return requestf("--json - and --csv - both want stdout; give one of them a file")
	}
	if req.html == "-" {
		return requestf("--html needs a file name")
	}
	if req.options.Degrade, err = study.ParseDegrade(c.StringSlice("degrade")); err != nil {
		return requestf("--degrade: %v", err)
	}
	if _, err := fmt.Sscanf(c.String("csv-input"), "%d", &req.csvInput); err != nil || req.csvInput < 1 {
		return requestf("--csv-input wants the number of an input in the file's list, from 1; got %q", c.String("csv-input"))
	}
	if req.options.Seed, err = strconv.ParseUint(c.String("seed"), 10, 63); err != nil || req.options.Seed < 1 {
		return requestf("--seed wants a whole number from 1; got %q", c.String("seed"))
	}
	if c.IsSet("csv-input") && req.csv == "" {
		return requestf("--csv-input needs --csv FILE")
	}
	l, err := loadLoop(file, c.String("rate"), c.String("map"))
	if err != nil {
		return err
	}
	if req.csv != "" && req.csvInput > len(l.Inputs) {
		return requestf("--csv-input %d: the file has %d inputs", req.csvInput, len(l.Inputs))
	}
	outputs := []namedPath{{"--json", req.json}, {"--csv", req.csv}, {"--html", req.html}}
	if err := checkOutputs(outputs, loopSources(file, l)); err != nil {
		return err
	}
	return compare(c.Context, c.App.Writer, c.App.ErrWriter, l, req)
}

// loadLoop reads a loop file and applies the overrides of the flags.
func loadLoop(file, rate, method string) (*loop.Loop, error) {
	o := loop.Options{Map: method}
	if rate != "" {
		period, err := loop.ParseRate(rate)
		if err != nil {
			return nil, requestf("--rate: %v", err)
		}
		o.Period = period
	}
	l, problems := loop.LoadWith(file, o)
	if len(problems) > 0 {
		return nil, problems
	}
	return l, nil
}

func compare(ctx context.Context, stdout, stderr io.Writer, l *loop.Loop, req compareRequest) error {
	p := newProgress(stderr)
	defer p.clear()
	req.options.Progress = p.step
	req.options.Curves = req.html != ""
	req.options.Version = versionText()
	result, err := study.RunCompare(ctx, l, req.options)
	if err != nil {
		return err
	}
	var csv study.SimulationCSV
	if req.csv != "" {
		if csv, err = study.Simulate(ctx, l, req.csvInput-1, req.options); err != nil {
			return err
		}
	}
	p.clear()
	return writeCompare(stdout, stderr, result, csv, req)
}

func writeCompare(stdout, stderr io.Writer, result *study.Compare, csv study.SimulationCSV, req compareRequest) error {
	if req.json != "-" && req.csv != "-" {
		if err := printCompare(stdout, result); err != nil {
			return err
		}
	}
	for _, w := range result.Warnings {
		printWrapped(stderr, "warning: ", w.Text)
	}
	if err := writeJSON(stdout, req.json, result); err != nil {
		return err
	}
	if req.csv != "" {
		if err := writeTo(stdout, req.csv, csv.Write); err != nil {
			return err
		}
	}
	quiet := req.json == "-" || req.csv == "-"
	return writeReport(stdout, stderr, req.html, quiet, func(w io.Writer) error { return charts.Report(w, result) })
}
