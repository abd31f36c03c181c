package main

import (
	"embed"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"

	"github.com/urfave/cli/v2"
)

//go:embed starters/*.yaml
var starterFiles embed.FS

// starter is a loop file that new can write.
type starter struct{ name, text string }

// starters are the files of the folder in order of their names; the first line
// of each says what it is.
func starters() []starter {
	entries, err := starterFiles.ReadDir("starters")
	if err != nil {
		panic(err) // embedded: cannot fail
	}
	var out []starter
	for _, e := range entries {
		text, err := starterFiles.ReadFile("starters/" + e.Name())
		if err != nil {
			panic(err)
		}
		out = append(out, starter{strings.TrimSuffix(e.Name(), ".yaml"), string(text)})
	}
	return out
}

// about is the first sentence of a starter's header.
func (s starter) about() string {
	line, _, _ := strings.Cut(s.text, "\n")
	line = strings.TrimPrefix(line, "# ")
	sentence, _, _ := strings.Cut(line, ".")
	return sentence
}

func newCommand() *cli.Command {
	return &cli.Command{
		Name:      "new",
		Usage:     "write a commented starter loop file",
		UsageText: "steadytick new STARTER LOOPFILE",
		Description: "Writes a loop file of invented data to start from; LOOPFILE may be - for stdout.\n" +
			"An existing file is not overwritten. Starters:\n\n" + starterList(),
		Action: newAction,
	}
}

func starterList() string {
	var b strings.Builder
	for _, s := range starters() {
		fmt.Fprintf(&b, "  %-10s %s\n", s.name, s.about())
	}
	return strings.TrimRight(b.String(), "\n")
}

func newAction(c *cli.Context) error {
	if c.Args().Len() == 0 {
		_, err := fmt.Fprintf(c.App.Writer, "Starters for steadytick new STARTER LOOPFILE:\n\n%s\n", starterList())
		return err
	}
	name, path := c.Args().Get(0), c.Args().Get(1)
	var chosen *starter
	for _, s := range starters() {
		if s.name == name {
			chosen = &s
		}
	}
	switch {
	case chosen == nil:
		return requestf("there is no starter %q; the starters are:\n%s", name, starterList())
	case path == "":
		return requestf("new needs a file to write: steadytick new %s LOOPFILE (- for stdout)", name)
	case c.Args().Len() > 2:
		return requestf("new takes a starter and a file; left over: %q", c.Args().Slice()[2:])
	case path != "-":
		if _, err := os.Lstat(path); !errors.Is(err, os.ErrNotExist) {
			return requestf("%s exists and is not overwritten; give another name or remove it", path)
		}
	}
	err := writeTo(c.App.Writer, path, func(w io.Writer) error { _, err := io.WriteString(w, chosen.text); return err })
	if err == nil && path != "-" {
		fmt.Fprintf(c.App.Writer, "Wrote %s: %s. Next: steadytick compare %s\n", path, chosen.about(), path)
	}
	return err
}
