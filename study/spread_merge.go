package study

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"hash"
	"io"
	"slices"
	"strings"

	"steadytick/loop"
)

// PartFile is a part that was written before.
type PartFile struct {
	Name   string // for messages
	Header PartHeader
	Open   func() (io.ReadCloser, error)
}

// partProblem is what is wrong with a part file, with its name and line.
func partProblem(name string, line int64, format string, args ...any) error {
	if line > 0 {
		name = fmt.Sprintf("%s:%d", name, line)
	}
	return fmt.Errorf("%s: "+format, append([]any{name}, args...)...)
}

// longestLine bounds a line of a part file: the header holds the loop file, 64 KiB of text of which JSON may make six bytes each.
const longestLine = 1 << 20

// ReadPart reads the header of a part file.
func ReadPart(name string, open func() (io.ReadCloser, error)) (PartFile, error) {
	p := PartFile{Name: name, Open: open}
	r, err := open()
	if err != nil {
		return p, partProblem(name, 0, "cannot read it: %v", err)
	}
	defer r.Close()
	lines := newPartLines(r)
	line, err := lines.next()
	if err != nil {
		return p, partProblem(name, 1, "%v", err)
	}
	d := json.NewDecoder(bytes.NewReader(line))
	d.DisallowUnknownFields()
	if err := d.Decode(&p.Header); err != nil || p.Header.Schema != partSchema {
		return p, partProblem(name, 1, "this is no part of a spread: the first line is not a header of schema %s as --shard with --out writes it", partSchema)
	}
	h := p.Header
	part := SpreadPart{h.Part[0], h.Part[1]}
	if part.Of < 1 || part.Of > mostParts || part.Index < 1 || part.Index > part.Of || h.Trials < int64(part.Of) || h.Trials > MostTrials {
		return p, partProblem(name, 1, "the header makes no sense: part %v of %d trials", part, h.Trials)
	}
	if first, last := part.span(h.Trials); first != h.First || last != h.Last {
		return p, partProblem(name, 1, "the header makes no sense: part %v of %d trials has the trials %d to %d, not %d to %d", part, h.Trials, first, last, h.First, h.Last)
	}
	return p, nil
}

// partLines reads lines with their checksum.
type partLines struct {
	r   *bufio.Reader
	sum hash.Hash
	buf []byte
}

func newPartLines(r io.Reader) *partLines {
	return &partLines{r: bufio.NewReaderSize(r, 1<<16), sum: sha256.New()}
}

var (
	errCutOff  = errors.New("the file ends here, before its last line: it was cut off; run the part again")
	errTooLong = errors.New("a line too long for a part of a spread")
)

// next is the next line with its end; it stays valid until the next call.
func (p *partLines) next() ([]byte, error) {
	p.buf = p.buf[:0]
	for {
		piece, err := p.r.ReadSlice('\n')
		p.buf = append(p.buf, piece...)
		switch {
		case len(p.buf) > longestLine:
			return nil, errTooLong
		case errors.Is(err, bufio.ErrBufferFull):
			continue
		case errors.Is(err, io.EOF):
			return nil, errCutOff
		}
		return p.buf, err
	}
}

// CheckParts holds the parts against each other and sorts them by number: they must be all parts of one study. The message names what is
// missing, there twice, or foreign.
func CheckParts(parts []PartFile) ([]PartFile, error) {
	if len(parts) == 0 {
		return nil, errors.New("no parts to merge")
	}
	out := slices.Clone(parts)
	slices.SortStableFunc(out, func(a, b PartFile) int { return a.Header.Part[0] - b.Header.Part[0] })
	first := parts[0]
	for _, p := range parts[1:] {
		if what := differs(first.Header, p.Header); what != "" {
			return nil, fmt.Errorf("%s and %s are parts of different studies: %s", first.Name, p.Name, what)
		}
	}
	of := first.Header.Part[1]
	var missing []string
	next := 1
	for _, p := range out {
		for ; next < p.Header.Part[0]; next++ {
			missing = append(missing, SpreadPart{next, of}.String())
		}
		if p.Header.Part[0] < next {
			k := slices.IndexFunc(out, func(q PartFile) bool { return q.Header.Part[0] == p.Header.Part[0] })
			return nil, fmt.Errorf("part %v is there twice: %s and %s", SpreadPart{p.Header.Part[0], of}, out[k].Name, p.Name)
		}
		next++
	}
	for ; next <= of; next++ {
		missing = append(missing, SpreadPart{next, of}.String())
	}
	if n := len(missing); n > 0 {
		if n > 10 {
			missing = append(missing[:10], fmt.Sprintf("%d more", n-10))
		}
		return nil, fmt.Errorf("%d of %d parts are missing: %s", n, of, strings.Join(missing, ", "))
	}
	return out, nil
}

// differs says in what two headers are of different studies, "" for nothing.
func differs(a, b PartHeader) string {
	for _, x := range []struct {
		what string
		a, b any
	}{
		{"seed", a.Seed, b.Seed}, {"draw", a.Draw, b.Draw}, {"trials", a.Trials, b.Trials}, {"parts", a.Part[1], b.Part[1]},
		{"simulate", a.Simulate, b.Simulate}, {"rate", a.Rate, b.Rate}, {"map", a.Map, b.Map}, {"version", a.Version, b.Version},
	} {
		if x.a != x.b {
			return fmt.Sprintf("%s is %v in the first and %v in the second", x.what, x.a, x.b)
		}
	}
	if a.Hash != b.Hash || a.Text != b.Text {
		return "the loop files, or files that they name, are not the same"
	}
	if !slices.Equal(a.Symbols, b.Symbols) || !slices.Equal(a.Metrics, b.Metrics) {
		return "symbols or metrics are not the same"
	}
	return ""
}

// MergeSpread makes of all parts, in any order, the result that one run would give, to the byte. l is the loop that they were run with; of o
// the part files give Draw, Trials, Seed, Simulate, Rate and Map. Memory does not grow with the trials.
func MergeSpread(ctx context.Context, l *loop.Loop, parts []PartFile, o SpreadOptions) (*Spread, error) {
	parts, err := CheckParts(parts)
	if err != nil {
		return nil, err
	}
	h := parts[0].Header
	o.Draw, o.Trials, o.Seed, o.Simulate, o.Rate, o.Map = h.Draw, h.Trials, h.Seed, h.Simulate, h.Rate, h.Map
	if h.Version != o.Version {
		return nil, fmt.Errorf("the parts were written by version %s, this is %s: merge with the version that ran them, or run them again", h.Version, o.Version)
	}
	if loopHash(l, h.Rate, h.Map) != h.Hash {
		return nil, fmt.Errorf("%s is not the loop file of the parts, or a file that it names has changed: %s was run with another text", l.File, parts[0].Name)
	}
	j, err := newSpreadJob(ctx, l, o)
	if err != nil {
		return nil, err
	}
	want := j.header(SpreadPart{1, h.Part[1]})
	if what := differs(want, h); what != "" {
		return nil, partProblem(parts[0].Name, 1, "the header does not belong to this loop: %s", what)
	}
	out, err := j.partWriter(o.Rows, SpreadPart{1, 1})
	if err != nil {
		return nil, err
	}
	step := j.progress("trials merged", int(j.trials))
	for _, p := range parts {
		if err := j.takeIn(p, out, step); err != nil {
			return nil, err
		}
	}
	if err := out.end(); err != nil {
		return nil, err
	}
	return j.result()
}

// takeIn adds the trials of one part.
func (j *spreadJob) takeIn(p PartFile, out *partWriter, step func(int)) error {
	r, err := p.Open()
	if err != nil {
		return partProblem(p.Name, 0, "cannot read it: %v", err)
	}
	defer r.Close()
	lines := newPartLines(r)
	head, err := lines.next()
	if err != nil {
		return partProblem(p.Name, 1, "%v", err)
	}
	lines.sum.Write(head)
	n := int64(1)
	for k := p.Header.First; k <= p.Header.Last; k++ {
		if err := j.ctx.Err(); err != nil {
			return err
		}
		n++
		line, err := lines.next()
		if err != nil {
			return partProblem(p.Name, n, "%v", err)
		}
		row, err := j.readRow(line)
		if err == nil && row.trial != k {
			err = fmt.Errorf("trial %d stands where trial %d belongs", row.trial, k)
		}
		if err == nil && (k == p.Header.First || k == p.Header.Last) {
			err = j.verify(row)
		}
		if err != nil {
			return partProblem(p.Name, n, "%v: the file is damaged; run the part again", err)
		}
		lines.sum.Write(line)
		j.tally.add(row)
		if err := out.write(row); err != nil {
			return err
		}
		step(int(k))
	}
	return endOfPart(lines, p, n+1)
}

// endOfPart reads the last line: the number of rows and the checksum of all before it, and nothing after it.
func endOfPart(lines *partLines, p PartFile, n int64) error {
	line, err := lines.next()
	if err != nil {
		return partProblem(p.Name, n, "%v", err)
	}
	var end partEnd
	if json.Unmarshal(line, &end) != nil || end.Rows != p.Header.Last-p.Header.First+1 {
		return partProblem(p.Name, n, "this is not the last line of a part: the file is damaged; run the part again")
	}
	if end.Hash != hex.EncodeToString(lines.sum.Sum(nil)) {
		return partProblem(p.Name, 0, "its checksum is wrong: the file was changed or damaged; run the part again")
	}
	if _, err := lines.r.ReadByte(); !errors.Is(err, io.EOF) {
		return partProblem(p.Name, n+1, "there is more after the last line")
	}
	return nil
}

// verify draws a trial of a part again: its symbols must be those of the row.
func (j *spreadJob) verify(row *spreadRow) error {
	again := &spreadRow{trial: row.trial}
	_, problems := j.drawSymbols(again)
	if len(problems) > 0 || row.failed != "" {
		return nil
	}
	if !slices.Equal(again.symbols, row.symbols) {
		return fmt.Errorf("trial %d of seed %d has other symbols", row.trial, j.o.Seed)
	}
	return nil
}
