package loop

import (
	"fmt"
	"math/big"
	"strings"
)

// reader turns the tree of one file into a Loop and collects what is wrong.
type reader struct {
	file     string
	lines    []string
	problems Problems
	faults   int      // problems reported, those beyond maxProblems included
	kept     struct { // the line that runes split last
		n    int
		line []rune
	}
	options Options
	draw    func(Symbol) *big.Rat // see DrawSymbols, nil: none
	source  func() []string       // gives lines when they are needed, nil: they are there
	tables  []Input               // of the loop that the tree was read for
	open    func(path string) ([]byte, error)
	evaluator
	own        []string // the unit names of output and effort
	zUsed      place    // where the first z model stands, for messages about rates
	timingAt   place    // where the rate stands
	filePeriod *big.Rat // seconds as the file says, nil when that is wrong
	periodic   bool     // a number of the controller was made with the period
	prewarp    prewarp  // of the map that was read last
	period     *big.Rat // seconds in force: the option's or the file's, nil when wrong
}

// fetch gets the lines when they are needed first.
func (r *reader) fetch() {
	if r.source != nil {
		r.lines, r.source = r.source(), nil
	}
}

func (r *reader) line(n int) string {
	r.fetch()
	if n < 1 || n > len(r.lines) {
		return ""
	}
	return r.lines[n-1]
}

// clamp moves a place into the file.
func (r *reader) clamp(p place) place {
	if p.line < 1 {
		return place{}
	}
	r.fetch()
	p.line = min(p.line, max(1, len(r.lines)))
	p.column = min(max(p.column, 1), len(r.runes(p.line))+1)
	return p
}

// runes are the characters of a line. They are kept: long lines hold many places.
func (r *reader) runes(n int) []rune {
	if r.kept.n != n {
		r.kept.n, r.kept.line = n, []rune(r.line(n))
	}
	return r.kept.line
}

// stands reports whether text is what the line of p holds from p on.
func (r *reader) stands(text string, p place) bool {
	line := r.runes(p.line)
	if p.line < 1 || p.column < 1 || p.column-1 > len(line) {
		return false
	}
	line = line[p.column-1:]
	for _, c := range text {
		if len(line) == 0 || line[0] != c {
			return false
		}
		line = line[1:]
	}
	return true
}

func (r *reader) report(at place, message, expected string) { r.reportNear(at, message, expected, "") }

func (r *reader) reportNear(at place, message, expected, near string) {
	r.faults++
	if len(r.problems) >= maxProblems {
		return
	}
	r.problems = append(r.problems, Problem{r.file, at.line, at.column, r.line(at.line), message, expected, near})
}

// inText reports an error within the text of n at its character.
func (r *reader) inText(n *node, e *exprError) {
	at := n.at
	if n.exact {
		at = r.clamp(place{n.start.line, n.start.column + e.at})
	}
	r.reportNear(at, e.message, e.expected, e.nearest)
}

// section is a mapping whose keys are known.
type section struct {
	r      *reader
	name   string // for messages
	at     place  // of its key, or its first key
	values map[string]entry
	meant  map[string]bool // keys that an unknown key was probably meant to be
	// partial: some keys of the section were refused and reported, so that missing
	// ones are not worth a word.
	partial bool
}

// section reads n as a mapping with the given keys; unknown ones are reported. It is
// never nil: a section that is not a mapping is reported and empty, and broken is true.
func (r *reader) section(n *node, name string, keys ...string) (s *section, broken bool) {
	s = &section{r: r, name: name, at: n.at, values: map[string]entry{}, meant: map[string]bool{}, partial: n.partial}
	if n.broken {
		return s, true
	}
	if n.kind != mapNode {
		r.report(n.at, fmt.Sprintf("%s is %s here", name, n.kind), "a mapping with "+list(keys))
		return s, true
	}
	for _, e := range n.entries {
		if !contains(keys, e.key) {
			near := nearest(e.key, keys)
			s.meant[near] = true
			r.reportNear(e.at, fmt.Sprintf("unknown key %s in %s", quote(e.key), name), "one of "+list(keys), near)
			continue
		}
		s.values[e.key] = e
	}
	return s, false
}

func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

func list(words []string) string { return strings.Join(words, ", ") }

// get is the value of a key, nil when it is not there or broken. A key without a value is
// reported.
func (s *section) get(key string) *node {
	e, ok := s.values[key]
	if !ok || e.value.broken {
		return nil
	}
	if e.value.kind == emptyNode {
		s.r.report(e.at, fmt.Sprintf("%s has no value", quote(key)), "a value after the colon, or no such key")
		return nil
	}
	return e.value
}

func (s *section) has(key string) bool { _, ok := s.values[key]; return ok }

// keyAt is where a key stands, the section's place when it does not.
func (s *section) keyAt(key string) place {
	if e, ok := s.values[key]; ok {
		return e.at
	}
	return s.at
}

// damaged reports whether something of the section was reported and is missing now.
func (s *section) damaged() bool {
	for _, e := range s.values {
		if e.value.broken || e.value.kind == emptyNode {
			return true
		}
	}
	return s.partial
}

// need is get for a key that must be there.
func (s *section) need(key, expected string) *node {
	if !s.has(key) {
		s.missing(fmt.Sprintf("%s has no %s", s.name, key), expected, key)
	}
	return s.get(key)
}

// missing reports that none of the keys is there, unless another message explains it.
func (s *section) missing(message, expected string, keys ...string) {
	for _, k := range keys {
		if s.meant[k] {
			return
		}
	}
	if !s.partial {
		s.r.report(s.at, message, expected)
	}
}

// together reports keys of which only one may stand; it returns the one, "" for none.
func (s *section) together(keys ...string) string {
	found := ""
	for _, k := range keys {
		if !s.has(k) {
			continue
		}
		if found != "" {
			first, second := s.keyAt(found), s.keyAt(k)
			if later(first, second) {
				second = first
			}
			s.r.report(second, fmt.Sprintf("%s and %s exclude each other", found, k), "one of "+list(keys))
			continue
		}
		found = k
	}
	return found
}

func later(a, b place) bool { return a.line > b.line || a.line == b.line && a.column > b.column }
