package main

import (
	"bufio"
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"math/big"
	"os"
	"path/filepath"

	"github.com/urfave/cli/v2"

	"steadytick/internal/wholefile"
	"steadytick/loop"
	"steadytick/study"
)

// writeLines writes a file of lines whole or not at all; an error of fill is its own.
func writeLines(path string, fill func(io.Writer) error) error {
	var inner error
	err := wholefile.Write(path, func(w io.Writer) error {
		inner = fill(w)
		return inner
	})
	if inner != nil {
		return inner
	}
	if err != nil {
		return requestf("cannot write %s: %v", path, err)
	}
	return nil
}

// spreadShard runs one part of the trials.
func spreadShard(c *cli.Context, l *loop.Loop, req spreadRequest) error {
	p := newProgress(c.App.ErrWriter)
	defer p.clear()
	req.options.Progress = p.step
	var h study.PartHeader
	err := writeLines(req.out, func(w io.Writer) (err error) {
		h, err = study.RunSpreadPart(c.Context, l, req.options, *req.shard, w)
		return spreadError(err)
	})
	if err != nil {
		return err
	}
	p.clear()
	_, err = fmt.Fprintf(c.App.Writer, "Part %v: trials %d to %d of %d in %s\n", *req.shard, h.First, h.Last, h.Trials, req.out)
	return err
}

// spreadMerge joins parts.
func spreadMerge(c *cli.Context, req spreadRequest) error {
	parts, file, err := spreadParts(c)
	if err != nil {
		return err
	}
	if parts, err = study.CheckParts(parts); err != nil {
		return requestf("%v", err)
	}
	l, err := loopOfParts(parts[0].Header, file)
	if err != nil {
		return err
	}
	sources := loopSources(l.File, l)
	for _, p := range parts {
		sources = append(sources, namedPath{"a part", p.Name})
	}
	if err := checkOutputs(req.outputs(), sources); err != nil {
		return err
	}
	return spread(c, req, func(ctx context.Context, o study.SpreadOptions) (*study.Spread, error) {
		return study.MergeSpread(ctx, l, parts, o)
	})
}

// spreadParts sorts the arguments of --merge: parts, and a loop file or none.
func spreadParts(c *cli.Context) (parts []study.PartFile, file string, err error) {
	for _, name := range c.Args().Slice() {
		is, err := looksLikePart(name)
		if err != nil {
			return nil, "", requestf("%s: cannot read it: %v", name, err)
		}
		if !is {
			if file != "" {
				return nil, "", requestf("--merge takes parts and one loop file; neither %s nor %s is a part", file, name)
			}
			file = name
			continue
		}
		p, err := study.ReadPart(name, func() (io.ReadCloser, error) { return os.Open(name) })
		if err != nil {
			return nil, "", requestf("%v", err)
		}
		parts = append(parts, p)
	}
	if len(parts) == 0 {
		return nil, "", requestf("--merge needs the parts that --shard with --out wrote: %s", c.Command.UsageText)
	}
	return parts, file, nil
}

// looksLikePart tells a file of JSON lines from a loop file: by its name, or because it begins with {" as no loop file in block style does.
func looksLikePart(name string) (bool, error) {
	info, err := os.Stat(name)
	if err == nil && !info.Mode().IsRegular() {
		return false, errors.New("not a regular file; parts are read more than once")
	}
	f, err := os.Open(name)
	if err != nil {
		var p *os.PathError
		if errors.As(err, &p) {
			err = p.Err
		}
		return false, err
	}
	defer f.Close()
	if filepath.Ext(name) == ".jsonl" {
		return true, nil
	}
	head, _ := bufio.NewReader(f).Peek(2)
	return bytes.Equal(head, []byte(`{"`)), nil
}

// loopOfParts is the loop that the parts were run with: that of the file given, or of the text that every part carries.
func loopOfParts(h study.PartHeader, file string) (*loop.Loop, error) {
	if file != "" {
		return loadLoop(file, h.Rate, h.Map)
	}
	o := loop.Options{Map: h.Map}
	if h.Rate != "" {
		period, err := loop.ParseRate(h.Rate)
		if err != nil {
			return nil, requestf("the rate in the parts: %v", err)
		}
		o.Period = new(big.Rat).Set(period)
	}
	needs := ""
	l, problems := loop.ParseWith(h.File, []byte(h.Text), func(path string) ([]byte, error) {
		needs = path
		return nil, errors.New("not in the parts")
	}, o)
	if needs != "" {
		return nil, requestf("the loop names the file %s, which the parts do not hold; give the loop file %s after them", needs, h.File)
	}
	if len(problems) > 0 {
		return nil, problems
	}
	return l, nil
}
