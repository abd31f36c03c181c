package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"steadytick/loop"
)

// Exit statuses.
const (
	exitDone    = 0
	exitNotMet  = 1
	exitRequest = 2
	exitFault   = 3
)

// requestError is a request that cannot be carried out: a wrong flag, a missing file.
type requestError struct{ text string }

func (e requestError) Error() string { return e.text }

func requestf(format string, args ...any) error {
	return requestError{fmt.Sprintf(format, args...)}
}

// errNotMet ends a command whose check failed and has been printed.
var errNotMet = errors.New("not met")

// exitStatus prints err and turns it into an exit status.
func exitStatus(stderr io.Writer, err error) int {
	var problems loop.Problems
	switch {
	case err == nil:
		return exitDone
	case errors.Is(err, errNotMet):
		return exitNotMet
	case errors.Is(err, context.Canceled):
		fmt.Fprintln(stderr, "steadytick: stopped; no file was written")
	case errors.As(err, &problems):
		fmt.Fprintln(stderr, strings.TrimRight(problems.Error(), "\n"))
	default:
		fmt.Fprintf(stderr, "steadytick: %v\n", err)
	}
	return exitRequest
}
