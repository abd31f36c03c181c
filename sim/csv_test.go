package sim

import (
	"bytes"
	"encoding/csv"
	"errors"
	"strconv"
	"testing"
)

func TestCSVReadsBack(t *testing.T) {
	plant, one := model(t, one(), rats("1", "1", "0"), "0.1"), unit(t)
	cfg := proportional(t, plantOf(t, plant, one), "1/7", "0.03", "0.5", 30)
	tr := run(t, cfg)
	twin := twinOf(t, TwinConfig{
		Plant: plant, Sensor: one, Terms: []TwinTerm{{gain(t, "0.5"), 1}}, Reference: Step(1), Duration: tr.FinalT, Times: tr.T,
	})
	var out bytes.Buffer
	if err := WriteCSV(&out, tr, twin); err != nil {
		t.Fatal(err)
	}
	if got, _, _ := bytes.Cut(out.Bytes(), []byte("\n")); string(got) != "t_s,r,y,m,u,y_continuous,u_continuous" {
		t.Errorf("header %q", got)
	}
	rows, err := csv.NewReader(&out).ReadAll()
	if err != nil || len(rows) != len(tr.T)+1 {
		t.Fatalf("%d rows, %v", len(rows), err)
	}
	for i, row := range rows[1:] {
		for k, want := range []float64{tr.T[i], tr.R[i], tr.Y[i], tr.M[i], tr.U[i], twin.Y[i], twin.U[i]} {
			if v, err := strconv.ParseFloat(row[k], 64); err != nil || v != want {
				t.Fatalf("row %d column %d: %q, want %v", i, k, row[k], want)
			}
		}
	}
	out.Reset()
	if err := WriteCSV(&out, tr, nil); err != nil {
		t.Fatal(err)
	}
	rows, err = csv.NewReader(&out).ReadAll()
	if err != nil || rows[3][5] != "" || rows[3][6] != "" || len(rows[3]) != 7 {
		t.Errorf("without a twin: %v, %v", rows[3], err)
	}
	twin.T[2] = 99
	if err := WriteCSV(&out, tr, twin); err == nil {
		t.Error("a twin on other instants has no error")
	}
	if err := WriteCSV(broken{}, tr, nil); !errors.Is(err, errBroken) {
		t.Errorf("a writer that fails: %v", err)
	}
}

var errBroken = errors.New("broken")

type broken struct{}

func (broken) Write([]byte) (int, error) { return 0, errBroken }
