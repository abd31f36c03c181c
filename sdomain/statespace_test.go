package sdomain_test

import (
	"encoding/json"
	"errors"
	"math/big"
	"os"
	"testing"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

func rat(s string) *big.Rat {
	x, ok := new(big.Rat).SetString(s)
	if !ok {
		panic("not a number: " + s)
	}
	return x
}

func rats(s ...string) []*big.Rat {
	out := make([]*big.Rat, len(s))
	for i := range s {
		out[i] = rat(s[i])
	}
	return out
}

func matrix(rows ...[]string) [][]*big.Rat {
	var out [][]*big.Rat
	for _, r := range rows {
		out = append(out, rats(r...))
	}
	return out
}

// Values by Gaussian elimination in Python's fractions: testdata/generate.py.
func TestStateSpaceAgainstElimination(t *testing.T) {
	text, err := os.ReadFile("testdata/reference.json")
	if err != nil {
		t.Fatal(err)
	}
	var ref struct {
		Systems []struct {
			A, B, C, D [][]string
			Points     []struct{ S, Det, G string }
		}
	}
	if err := json.Unmarshal(text, &ref); err != nil {
		t.Fatal(err)
	}
	if len(ref.Systems) < 8 {
		t.Fatalf("%d systems", len(ref.Systems))
	}
	for _, c := range ref.Systems {
		m, err := sdomain.FromStateSpace(matrix(c.A...), matrix(c.B...), matrix(c.C...), matrix(c.D...))
		if err != nil {
			t.Fatal(err)
		}
		if m.Ratio.Order() != len(c.A) {
			t.Errorf("order %d with %d states", m.Ratio.Order(), len(c.A))
		}
		den := m.Ratio.DenPoly()
		den = den.Scale(new(big.Rat).Inv(den.Lead()))
		for _, p := range c.Points {
			if got, ok := m.Ratio.Eval(rat(p.S)); !ok || got.Cmp(rat(p.G)) != 0 {
				t.Errorf("%d states: G(%s) is %v, want %s", len(c.A), p.S, got, p.G)
			}
			if got := den.Eval(rat(p.S)); got.Cmp(rat(p.Det)) != 0 {
				t.Errorf("%d states: det at %s is %s, want %s", len(c.A), p.S, got.RatString(), p.Det)
			}
		}
	}
}

// Controllable canonical form of (2s² + 3s + 5)/(s³ + 7s² + 11s + 13) + 1/2, by its definition.
func TestStateSpaceCanonicalForm(t *testing.T) {
	m, err := sdomain.FromStateSpace(
		matrix([]string{"0", "1", "0"}, []string{"0", "0", "1"}, []string{"-13", "-11", "-7"}),
		matrix([]string{"0"}, []string{"0"}, []string{"1"}),
		matrix([]string{"5", "3", "2"}), matrix([]string{"0.5"}))
	if err != nil {
		t.Fatal(err)
	}
	want, err := sdomain.FromPolynomials(rats("0.5", "5.5", "8.5", "11.5"), rats("1", "7", "11", "13"))
	if err != nil {
		t.Fatal(err)
	}
	if !m.Ratio.NumPoly().Equal(want.Ratio.NumPoly()) || !m.Ratio.DenPoly().Equal(want.Ratio.DenPoly()) {
		t.Errorf("got %s, want %s", m.Ratio.Format("s"), want.Ratio.Format("s"))
	}
}

// Three integrators in a row and a mode that the input does not reach: 1/s³, with s + 4 hidden.
func TestStateSpaceKeepsHiddenModes(t *testing.T) {
	m, err := sdomain.FromStateSpace(
		matrix([]string{"0", "1", "0", "0"}, []string{"0", "0", "1", "0"}, []string{"0", "0", "0", "0"}, []string{"0", "0", "0", "-4"}),
		matrix([]string{"0"}, []string{"0"}, []string{"1"}, []string{"0"}),
		matrix([]string{"1", "0", "0", "3"}), matrix([]string{"0"}))
	if err != nil {
		t.Fatal(err)
	}
	if h := m.Ratio.Hidden(); !h.Equal(exact.NewPoly(rat("1"), rat("0.25"))) {
		t.Errorf("hidden %s, want 1 + 0.25*s", h.Format("s"))
	}
	if red := m.Ratio.Reduced(); red.Order() != 3 || red.OriginPoles != 3 || red.Gain.Cmp(rat("1")) != 0 {
		t.Errorf("reduced to %s", red.Format("s"))
	}
}

func TestStateSpaceShapes(t *testing.T) {
	one := matrix([]string{"1"})
	two := matrix([]string{"1", "2"}, []string{"3", "4"})
	col := matrix([]string{"1"}, []string{"1"})
	row := matrix([]string{"1", "1"})
	for _, c := range []struct {
		a, b, c, d [][]*big.Rat
		bad        string
	}{
		{row, one, one, one, "A"}, {two, one, row, one, "B"}, {two, col, col, one, "C"},
		{two, col, row, row, "D"}, {two, col, row, nil, "D"}, {two, two, row, one, "B"},
		{matrix([]string{"1", "2"}, []string{"3"}), col, row, one, "A"}, {one, nil, one, one, "B"},
		{one, one, nil, one, "C"},
	} {
		var shape *sdomain.ShapeError
		if _, err := sdomain.FromStateSpace(c.a, c.b, c.c, c.d); !errors.As(err, &shape) || shape.Matrix != c.bad {
			t.Errorf("want an error about %s, got %v", c.bad, err)
		}
	}
	m, err := sdomain.FromStateSpace(nil, nil, matrix(nil), matrix([]string{"3"}))
	if err != nil || m.Ratio.Order() != 0 || m.Ratio.Gain.Cmp(rat("3")) != 0 {
		t.Errorf("no states: %v, %v", m, err)
	}
	big41 := make([][]*big.Rat, 41)
	var size *exact.SizeError
	if _, err := sdomain.FromStateSpace(big41, nil, nil, nil); !errors.As(err, &size) {
		t.Errorf("41 states gave %v", err)
	}
}

func BenchmarkStateSpace20(b *testing.B) {
	text, err := os.ReadFile("testdata/reference.json")
	if err != nil {
		b.Fatal(err)
	}
	var ref struct {
		Systems []struct{ A, B, C, D [][]string }
	}
	if err := json.Unmarshal(text, &ref); err != nil {
		b.Fatal(err)
	}
	c := ref.Systems[len(ref.Systems)-1]
	ma, mb, mc, md := matrix(c.A...), matrix(c.B...), matrix(c.C...), matrix(c.D...)
	for b.Loop() {
		if _, err := sdomain.FromStateSpace(ma, mb, mc, md); err != nil {
			b.Fatal(err)
		}
	}
}
