package main

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"time"

	"steadytick/internal/wholefile"
	"steadytick/loop"
)

// writeTo writes to path, or to stdout for "-".
func writeTo(stdout io.Writer, path string, fill func(io.Writer) error) error {
	if path == "-" {
		return fill(stdout)
	}
	if err := wholefile.Write(path, fill); err != nil {
		return requestf("cannot write %s: %v", path, err)
	}
	return nil
}

// namedPath is a file with what it is in a message: a flag, "the loop file".
type namedPath struct{ what, path string }

// loopSources lists what a command reads for a loop file: the file itself and the inputs that it
// names. l is nil for a file that could not be read.
func loopSources(file string, l *loop.Loop) []namedPath {
	out := []namedPath{{"the loop file", file}}
	if l == nil {
		return out
	}
	for _, in := range l.Inputs {
		if in.Kind != "file" {
			continue
		}
		name := in.File
		if !filepath.IsAbs(name) {
			name = filepath.Join(filepath.Dir(file), name)
		}
		out = append(out, namedPath{"an input of the loop file", name})
	}
	return out
}

// checkOutputs refuses an output, named by its flag, that would replace what the command reads, or another
// output. An output "" is not asked for, "-" is stdout.
func checkOutputs(outputs, sources []namedPath) error {
	taken := append([]namedPath(nil), sources...)
	for _, out := range outputs {
		if out.path == "" || out.path == "-" {
			continue
		}
		for _, x := range taken {
			if sameFile(out.path, x.path) {
				return requestf("%s %s would overwrite %s; give another name", out.what, out.path, x.what)
			}
		}
		taken = append(taken, namedPath{"the file of " + out.what, out.path})
	}
	return nil
}

// sameFile tells whether two paths lead to one file, there or not yet there.
func sameFile(a, b string) bool {
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	if errX == nil && errY == nil {
		return os.SameFile(x, y)
	}
	p, errP := filepath.Abs(a)
	q, errQ := filepath.Abs(b)
	return errP == nil && errQ == nil && p == q
}

// progress shows how far a long piece of work has come, as a bar on one line of a terminal; elsewhere it is silent, and on a
// terminal for the first moments too.
type progress struct {
	w     io.Writer
	live  bool
	shown bool
	start time.Time
	last  time.Time
}

const (
	quietFor  = 300 * time.Millisecond
	drawEvery = 80 * time.Millisecond
	barCells  = 30
)

func newProgress(w io.Writer) *progress {
	p := &progress{w: w, start: time.Now()}
	if f, ok := w.(*os.File); ok {
		info, err := f.Stat()
		p.live = err == nil && info.Mode()&os.ModeCharDevice != 0
	}
	return p
}

// step shows what is being done, part of whole.
func (p *progress) step(what string, done, all int) {
	now := time.Now()
	if !p.live || now.Sub(p.start) < quietFor || now.Sub(p.last) < drawEvery && done < all {
		return
	}
	p.shown, p.last = true, now
	fmt.Fprintf(p.w, "\r\x1b[K%s", bar(what, done, all))
}

// bar is one line of at most 78 characters.
func bar(what string, done, all int) string {
	cells := barCells * done / max(all, 1)
	return fmt.Sprintf("%s [%s%s] %d of %d", padRight(cut(what, 24), 12), strings.Repeat("#", cells), strings.Repeat(" ", barCells-cells), done, all)
}

// clear removes the line.
func (p *progress) clear() {
	if p.live && p.shown {
		fmt.Fprint(p.w, "\r\x1b[K")
		p.shown = false
	}
}
