package main

import (
	"strings"

	"github.com/urfave/cli/v2"
)

// permute moves the flags of a command line before its arguments, because the
// flag parser stops at the first argument and would lose what follows it. A bare
// "-" is an argument; after "--" everything is.
func permute(app *cli.App, args []string) ([]string, error) {
	if len(args) < 2 {
		return args, nil
	}
	var command *cli.Command
	at := 1
	for ; at < len(args); at++ {
		if command = app.Command(args[at]); command != nil || !strings.HasPrefix(args[at], "-") {
			break
		}
	}
	if command == nil {
		return args, nil
	}
	takesValue := map[string]bool{}
	for _, f := range command.Flags {
		_, isBool := f.(*cli.BoolFlag)
		for _, n := range f.Names() {
			takesValue[n] = !isBool
		}
	}
	var flags, rest []string
	tail := args[at+1:]
	for i := 0; i < len(tail); i++ {
		a := tail[i]
		if a == "--" {
			rest = append(rest, tail[i+1:]...)
			break
		}
		if len(a) < 2 || a[0] != '-' {
			rest = append(rest, a)
			continue
		}
		flags = append(flags, a)
		name := strings.TrimLeft(a, "-")
		if !takesValue[name] {
			continue
		}
		if i+1 == len(tail) || tail[i+1] == "--" {
			return nil, requestf("%s needs a value (steadytick %s --help lists the flags)", a, command.Name)
		}
		i++
		flags = append(flags, tail[i])
	}
	out := append([]string{}, args[:at+1]...)
	out = append(out, flags...)
	out = append(out, "--")
	return append(out, rest...), nil
}
