package main

import (
	"encoding/json"
	"fmt"
	"io"

	"steadytick/charts"
)

// writeJSON writes a result to path, "-" for stdout; "" is not asked for.
func writeJSON(stdout io.Writer, path string, result any) error {
	if path == "" {
		return nil
	}
	return writeTo(stdout, path, func(w io.Writer) error {
		e := json.NewEncoder(w)
		e.SetEscapeHTML(false)
		e.SetIndent("", "  ")
		return e.Encode(result)
	})
}

// writeReport writes a report to path, "" is not asked for, and says where it is unless stdout carries a result already.
func writeReport(stdout, stderr io.Writer, path string, quiet bool, fill func(io.Writer) error) error {
	if path == "" {
		return nil
	}
	if err := writeTo(stdout, path, fill); err != nil {
		return err
	}
	if !charts.Embedded() {
		printWrapped(stderr, "note: ", "this build holds no chart runtime, so the report loads it from the network when it is opened; `make runtime` and a new build make it self-contained")
	}
	if !quiet {
		fmt.Fprintf(stdout, "\nReport: %s\n", path)
	}
	return nil
}
