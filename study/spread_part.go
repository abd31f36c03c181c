package study

import (
	"bufio"
	"context"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"hash"
	"io"
	"math"
	"strconv"
	"strings"

	"steadytick/loop"
)

// partSchema is that of the first line of a part file.
const partSchema = "steadytick/spread-part/1"

// SpreadPart is one part of the trials: part Index of Of, from 1.
type SpreadPart struct{ Index, Of int }

// mostParts bounds how many parts there can be.
const mostParts = 100_000

// ParseSpreadPart reads "2/5".
func ParseSpreadPart(text string) (SpreadPart, error) {
	first, second, ok := strings.Cut(text, "/")
	i, err1 := strconv.Atoi(strings.TrimSpace(first))
	n, err2 := strconv.Atoi(strings.TrimSpace(second))
	if !ok || err1 != nil || err2 != nil || n < 1 || n > mostParts || i < 1 || i > n {
		return SpreadPart{}, fmt.Errorf("%q is no part; the parts of 3 are 1/3, 2/3 and 3/3", text)
	}
	return SpreadPart{i, n}, nil
}

func (p SpreadPart) String() string { return fmt.Sprintf("%d/%d", p.Index, p.Of) }

// span gives the first and the last trial of a part: the parts follow each other and differ by one trial at most.
func (p SpreadPart) span(trials int64) (first, last int64) {
	at := func(i int) int64 { return int64(i) * trials / int64(p.Of) }
	return at(p.Index-1) + 1, at(p.Index)
}

// PartHeader is the first line of a part file: everything that tells which study the part belongs to.
type PartHeader struct {
	Schema   string   `json:"schema"`
	Part     [2]int   `json:"part"` // index, of
	First    int64    `json:"first_trial"`
	Last     int64    `json:"last_trial"`
	Trials   int64    `json:"trials"` // of all parts
	Draw     string   `json:"draw"`
	Seed     uint64   `json:"seed"`
	Simulate bool     `json:"simulate"`
	Version  string   `json:"version"`
	Loop     string   `json:"loop"`
	Hash     string   `json:"loop_sha256"` // of the loop file, the input files it names, and the flags it was read with
	File     string   `json:"file"`
	Rate     string   `json:"rate"` // flags that the loop file was read with
	Map      string   `json:"map"`
	Symbols  []string `json:"symbols"`
	Metrics  []string `json:"metrics"`
	Text     string   `json:"loop_file"`
}

// partEnd is the last line.
type partEnd struct {
	Rows int64  `json:"rows"`
	Hash string `json:"sha256"` // of every byte before this line
}

func (j *spreadJob) header(p SpreadPart) PartHeader {
	h := PartHeader{
		Schema: partSchema, Part: [2]int{p.Index, p.Of}, Trials: j.trials, Draw: j.o.Draw, Seed: j.o.Seed, Simulate: j.o.Simulate,
		Version: j.o.Version, Loop: j.l.Name, Hash: loopHash(j.l, j.o.Rate, j.o.Map), File: j.l.File, Rate: j.o.Rate, Map: j.o.Map,
		Metrics: j.metrics, Text: string(j.l.Source),
	}
	h.First, h.Last = p.span(j.trials)
	for _, s := range j.symbols {
		h.Symbols = append(h.Symbols, s.Name)
	}
	return h
}

// loopHash tells loops apart: the file to the byte, the rows of the files it names, the flags it was read with.
func loopHash(l *loop.Loop, flags ...string) string {
	h := sha256.New()
	write := func(b []byte) {
		_ = binary.Write(h, binary.LittleEndian, uint64(len(b))) // a hash does not fail
		h.Write(b)
	}
	write(l.Source)
	for _, f := range flags {
		write([]byte(f))
	}
	rows := func(lists ...[]float64) {
		for _, list := range lists {
			b := make([]byte, 0, 8*len(list))
			for _, v := range list {
				b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
			}
			write(b)
		}
	}
	for _, in := range l.Inputs {
		rows(in.Times, in.Values)
	}
	for _, d := range l.Disturbances {
		rows(d.Times, d.Values)
	}
	return hex.EncodeToString(h.Sum(nil))
}

// RunSpreadPart runs the trials of one part and writes them to w: a header, a line a trial, and a last line with a checksum.
func RunSpreadPart(ctx context.Context, l *loop.Loop, o SpreadOptions, p SpreadPart, w io.Writer) (PartHeader, error) {
	j, err := newSpreadJob(ctx, l, o)
	if err != nil {
		return PartHeader{}, err
	}
	if int64(p.Of) > j.trials {
		return PartHeader{}, fmt.Errorf("%d parts of %d trials: some would be empty; give fewer parts or more trials", p.Of, j.trials)
	}
	out, err := j.partWriter(w, p)
	if err != nil {
		return PartHeader{}, err
	}
	h := j.header(p)
	if err := j.run(h.First, h.Last, out.write); err != nil {
		return h, err
	}
	return h, out.end()
}

// partWriter writes the lines of a part; nil writes nothing.
type partWriter struct {
	j    *spreadJob
	w    *bufio.Writer
	sum  hash.Hash
	line []byte
	rows int64
}

func (j *spreadJob) partWriter(w io.Writer, p SpreadPart) (*partWriter, error) {
	if w == nil {
		return nil, nil
	}
	out := &partWriter{j: j, w: bufio.NewWriterSize(w, 1<<16), sum: sha256.New()}
	head, err := json.Marshal(j.header(p))
	if err != nil {
		return nil, err
	}
	return out, out.put(append(head, '\n'))
}

func (p *partWriter) put(line []byte) error {
	p.sum.Write(line)
	_, err := p.w.Write(line)
	return err
}

func (p *partWriter) write(row *spreadRow) error {
	if p == nil {
		return nil
	}
	p.line = p.j.appendRow(p.line[:0], row)
	p.rows++
	return p.put(p.line)
}

func (p *partWriter) end() error {
	if p == nil {
		return nil
	}
	last, err := json.Marshal(partEnd{p.rows, hex.EncodeToString(p.sum.Sum(nil))})
	if err != nil {
		return err
	}
	if err := p.put(append(last, '\n')); err != nil {
		return err
	}
	return p.w.Flush()
}
