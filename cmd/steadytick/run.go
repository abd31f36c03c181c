package main

import (
	"context"
	"io"
	"runtime/debug"
	"strings"

	"github.com/urfave/cli/v2"
)

// version is what the report and --version say; a release build sets it with -ldflags.
var version = ""

func versionText() string {
	if version != "" {
		return version
	}
	if info, ok := debug.ReadBuildInfo(); ok && info.Main.Version != "" && info.Main.Version != "(devel)" {
		return info.Main.Version
	}
	return "development"
}

// run parses the command line and carries out one command.
func run(ctx context.Context, stdout, stderr io.Writer, args []string) error {
	app := &cli.App{
		Name:  "steadytick",
		Usage: "what sampling, delay and finite words cost a feedback loop",
		Description: "One loop file describes plant, controller, sensor, actuator, timing and requirements;\n" +
			"every command reads it. Flags may stand before or after the file.\n\n" +
			"A linear analysis of a model is no proof of safety: see the cautions in the README.",
		Version:                   versionText(),
		Writer:                    stdout,
		ErrWriter:                 stderr,
		ExitErrHandler:            func(*cli.Context, error) {},
		DisableSliceFlagSeparator: true,
		HideHelpCommand:           true,
		Suggest:                   true,
		Commands:                  []*cli.Command{compareCommand(), gateCommand(), rateCommand(), spreadCommand(), newCommand()},
		OnUsageError:              usageError,
		CommandNotFound:           nil,
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return requestf("unknown command %q; the commands are %s (steadytick --help)", c.Args().First(), commandNames(c.App.Commands))
			}
			return cli.ShowAppHelp(c)
		},
	}
	for _, c := range app.Commands {
		c.OnUsageError = usageError
		c.HideHelpCommand = true
	}
	args, err := permute(app, args)
	if err != nil {
		return err
	}
	return app.RunContext(ctx, args)
}

// commandNames lists commands: "compare, gate and new".
func commandNames(list []*cli.Command) string {
	names := make([]string, len(list))
	for i, c := range list {
		names[i] = c.Name
	}
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " and " + names[last]
}

func usageError(c *cli.Context, err error, _ bool) error {
	name := "steadytick"
	if c.Command != nil && c.Command.Name != "" && c.Command.Name != name {
		name += " " + c.Command.Name
	}
	return requestf("%v (%s --help lists the flags)", err, name)
}

// oneFile returns the single argument a command takes.
func oneFile(c *cli.Context, what string) (string, error) {
	switch c.Args().Len() {
	case 0:
		return "", requestf("%s needs a %s: %s", c.Command.Name, what, c.Command.UsageText)
	case 1:
		return c.Args().First(), nil
	}
	return "", requestf("%s takes one %s; left over: %s", c.Command.Name, what, strings.Join(c.Args().Slice()[1:], " "))
}
