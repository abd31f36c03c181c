package charts

import (
	"errors"
	"io"

	"steadytick/study"
)

func SpreadReport(w io.Writer, r *study.Spread) error { return errors.New("not yet") }
