package sim

import (
	"bufio"
	"fmt"
	"io"
	"strconv"
)

// WriteCSV writes a run with its continuous twin, one row an instant, after the header line
//
//	t_s,r,y,m,u,y_continuous,u_continuous
//
// Floats read back exactly. With twin nil the last two columns are empty; else twin
// must hold the same instants (TwinConfig.Times = tr.T), and where it ended early they
// are empty too. Errors: of w, and a twin on other instants.
func WriteCSV(w io.Writer, tr *Trace, twin *TwinTrace) error {
	out := bufio.NewWriter(w)
	out.WriteString("t_s,r,y,m,u,y_continuous,u_continuous\n")
	var line []byte
	for i, t := range tr.T {
		line = line[:0]
		for _, v := range []float64{t, tr.R[i], tr.Y[i], tr.M[i], tr.U[i]} {
			line = strconv.AppendFloat(line, v, 'g', -1, 64)
			line = append(line, ',')
		}
		switch {
		case twin == nil || i >= len(twin.T):
			line = append(line, ',')
		case twin.T[i] != t:
			return fmt.Errorf("the twin is at %g s where the run is at %g s", twin.T[i], t)
		default:
			line = strconv.AppendFloat(line, twin.Y[i], 'g', -1, 64)
			line = append(line, ',')
			line = strconv.AppendFloat(line, twin.U[i], 'g', -1, 64)
		}
		out.Write(append(line, '\n'))
	}
	return out.Flush()
}
