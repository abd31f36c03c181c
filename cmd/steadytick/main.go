// Command steadytick tells what happens to a feedback loop when it moves from
// continuous time to a timer interrupt. Each command is a file; no mathematics
// is done here.
package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"
)

func main() {
	if os.Getenv("GOGC") == "" {
		debug.SetGCPercent(400) // a run of tenths of a second over some 50 MB: collecting less saves a fifth of it
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := Main(ctx, os.Stdout, os.Stderr, os.Args)
	stop()
	os.Exit(code)
}

// Main runs one command line and returns its exit status: 0 done, 1 a
// requirement or check is not met, 2 the request or a file is wrong, 3 a fault in the program.
func Main(ctx context.Context, stdout, stderr io.Writer, args []string) (code int) {
	defer func() {
		if r := recover(); r != nil {
			fmt.Fprintf(stderr, "steadytick: a fault in the program: %v\nPlease report it with the loop file and these lines:\n%s", r, debug.Stack())
			code = exitFault
		}
	}()
	return exitStatus(stderr, run(ctx, stdout, stderr, args))
}
