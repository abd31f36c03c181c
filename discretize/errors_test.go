package discretize

import (
	"errors"
	"math/big"
	"strings"
	"testing"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

func isType[E error](err error) bool {
	var e E
	return errors.As(err, &e)
}

func TestErrors(t *testing.T) {
	lag := model(t, []int64{1}, []int64{1, 1})
	late := func(tau string) sdomain.Model { return sdomain.Model{Ratio: lag.Ratio, Delay: dec(t, tau)} }
	hold := func(m sdomain.Model, T, delay string) error {
		_, err := Hold(m, dec(t, T), dec(t, delay))
		return err
	}
	mapped := func(m sdomain.Model, method, at, T string) error {
		s := Spec{Method: method}
		if at != "" {
			s.At = dec(t, at)
		}
		_, err := Map(m, s, dec(t, T))
		return err
	}
	fast := model(t, []int64{1}, []int64{-700, 1})
	for _, c := range []struct {
		name string
		err  error
		is   func(error) bool
		text string // a part of the message
	}{
		{"improper plant", hold(model(t, []int64{0, 0, 1}, []int64{1, 1}), "1", "0"), isType[*ImproperError], "1 degrees"},
		{"unstable", hold(fast, "1", "0"), isType[*GrowthError], "e^700"},
		{"unstable controller", mapped(fast, "matched", "", "1"), isType[*GrowthError], "e^700"},
		{"unstable, triangle", mapped(fast, "triangle", "", "1"), isType[*GrowthError], "e^700"},
		{"too fast a pole", hold(lag, "1e13", "0"), isType[*RangeError], "1e+13"},
		{"overflow", hold(model(t, []int64{1}, []int64{0, 0, 0, 0, 0, 0, 0, 1}), "1e60", "0"), isType[*RangeError], ""},
		{"zero far right, matched", mapped(model(t, []int64{-800, 1}, []int64{1, 2, 1}), "matched", "", "1"), isType[*GrowthError], "zeros"},
		{"pole next to nothing", hold(fromFactors(t, [][]string{{"1"}}, [][]string{{"1e-290", "1"}}), "1", "0"), isType[*RangeError], "1e-290"},
		{"gain next to nothing", hold(fromFactors(t, [][]string{{"1e-400"}}, [][]string{{"1", "1"}}), "1", "0"), isType[*RangeError], "leading"},
		{"gain beyond all bounds", mapped(fromFactors(t, [][]string{{"1e400"}}, [][]string{{"1", "1"}}), "matched", "", "1"), isType[*RangeError], "gain"},
		{"no period", hold(lag, "0", "0"), isType[*PeriodError], "positive"},
		{"negative period", mapped(lag, "tustin", "", "-1"), isType[*PeriodError], "-1"},
		{"more than a tick ahead", hold(lag, "1", "-1.25"), isType[*DelayError], "-1.25"},
		{"too many ticks", hold(lag, "1e-9", "1e9"), isType[*DelayError], "too many"},
		{"half a tick in a controller", mapped(late("0.5"), "tustin", "", "1"), isType[*DelayError], "whole number of ticks"},
		{"half a tick, hold map", mapped(late("1.5"), "hold", "", "1"), isType[*DelayError], "1.5"},
		{"improper after forward", mapped(sdomain.S(), "forward", "", "1"), isType[*ImproperError], "1 ticks ahead"},
		{"improper matched", mapped(sdomain.S(), "matched", "", "1"), isType[*ImproperError], "1 degrees"},
		{"improper triangle", mapped(sdomain.S(), "triangle", "", "1"), isType[*ImproperError], "1 degrees"},
		{"pole at 2/T", mapped(model(t, []int64{1}, []int64{-2, 1}), "tustin", "", "1"), isType[*ImproperError], "ahead"},
		{"pole at 1/T", mapped(model(t, []int64{1}, []int64{-1, 1}), "backward", "", "1"), isType[*ImproperError], "ahead"},
		{"no such map", mapped(lag, "tustni", "", "1"), isType[*MethodError], "tustni"},
		{"prewarped without frequency", mapped(lag, "prewarped", "", "1"), isType[*AtError], "frequency"},
		{"prewarped at 0", mapped(lag, "prewarped", "0", "1"), isType[*AtError], "frequency"},
		{"prewarped above Nyquist", mapped(lag, "prewarped", "3.2", "1"), isType[*AtError], "3.2"},
		{"prewarped far above Nyquist", mapped(lag, "prewarped", "1e400", "1"), isType[*AtError], ""},
	} {
		if c.err == nil || !c.is(c.err) || !strings.Contains(c.err.Error(), c.text) {
			t.Errorf("%s: got error %v", c.name, c.err)
		}
	}
	// half the sample rate, given in Hz, reaches the map rounded: refused as well
	for _, f := range []float64{500, 123.456} {
		_, err := Map(lag, Spec{Method: "prewarped", At: hertz(f)}, new(big.Rat).Inv(new(big.Rat).SetFloat64(2*f)))
		if !isType[*AtError](err) {
			t.Errorf("prewarped at exactly half of %g Hz: %v", 2*f, err)
		}
	}
}

// TestPlain: models without poles, without anything, and long delays.
func TestPlain(t *testing.T) {
	five := sdomain.Model{Ratio: exact.Const(big.NewRat(5, 1)), Delay: dec(t, "10000.0")}
	h := mustHold(t, five, "1", "0")
	if h.TF.Ticks != 10000 || len(h.TF.Poles) != 0 || len(h.TF.Num) != 1 || h.TF.Num[0].Float64() != 5 {
		t.Errorf("gain 5, 10 000 ticks: %+v", h.TF)
	}
	h = mustHold(t, five, "1", "0.25") // between ticks: 5·z^-10001
	n, d := zCoefficients(h)
	near(t, "num", n, []float64{5}, 0)
	near(t, "den", d, []float64{0, 1}, 0)
	zero := sdomain.Model{Ratio: exact.Const(new(big.Rat)), Delay: new(big.Rat)}
	for _, method := range Methods() {
		m, err := Map(zero, Spec{Method: method, At: big.NewRat(1, 1)}, big.NewRat(1, 1))
		if err != nil || len(m.TF.Num) != 0 {
			t.Errorf("%s of 0: %v %v", method, m.TF, err)
		}
		m, err = Map(five, Spec{Method: method, At: big.NewRat(1, 1)}, big.NewRat(2, 1))
		if err != nil || m.TF.Ticks != 5000 || len(m.TF.Num) != 1 || m.TF.Num[0].Float64() != 5 || len(m.TF.Poles) != 0 {
			t.Errorf("%s of 5 with 5000 ticks: %+v %v", method, m.TF, err)
		}
	}
	if h := mustHold(t, zero, "1", "2.5"); len(h.TF.Num) != 0 || h.TF.Ticks != 2 {
		t.Errorf("hold of 0: %+v", h.TF)
	}
	// 1 + 1/(s+1) at −T, the value just before the switching (closed form):
	// 1 + (1 − q)·z/(z − q) = ((2 − q)·z − q)/(z − q), q = e^-1
	m := mustHold(t, model(t, []int64{2, 1}, []int64{1, 1}), "1", "-1")
	n, _ = zCoefficients(m)
	const e1 = 0.36787944117144232
	near(t, "before switching", n, []float64{-e1, 2 - e1}, 4e-16)
}

// TestPathological: a mode −a ± jω disappears at T = kπ/ω (Kalman, Ho, Narendra,
// 1963; closed form).
func TestPathological(t *testing.T) {
	m := model(t, []int64{1}, []int64{10001, 2, 1}) // −1 ± j100
	find := func(m sdomain.Model, T *big.Rat) []Alias {
		a, err := Pathological(m, T)
		if err != nil {
			t.Fatal(err)
		}
		return a
	}
	for k := int64(1); k <= 3; k++ {
		T := new(big.Rat).Mul(new(big.Rat).SetFloat64(3.141592653589793), big.NewRat(k, 100))
		a := find(m, T)
		if len(a) != 1 || a[0].K != int(k) || !(a[0].Frequency-100 <= 1e-12 && a[0].Frequency-100 >= -1e-12) || !(a[0].Closeness <= 1e-14) {
			t.Errorf("k = %d: %+v", k, a)
		}
	}
	// 2·100 rad/s · 0.0312 s = 6.24 rad, 2π − 6.24 = 0.0431853 from a turn
	if a := find(m, dec(t, "0.0312")); len(a) != 1 || !(a[0].Closeness > 0.04318530 && a[0].Closeness < 0.04318531) {
		t.Errorf("near: %+v", a)
	}
	for _, T := range []string{"0.001", "0.03", "0.0157"} {
		if a := find(m, dec(t, T)); len(a) != 0 {
			t.Errorf("T = %s: %+v", T, a)
		}
	}
	// a double mode is one alias, not four
	m = model(t, []int64{1}, []int64{10001, 2, 1})
	m, err := m.Mul(m)
	if err != nil {
		t.Fatal(err)
	}
	if a := find(m, dec(t, "0.0314159")); len(a) != 1 {
		t.Errorf("double mode: %+v", a)
	}
	// an integrator and an undamped mode at ωT = 2π, and the mode's own pair at k = 2
	m = model(t, []int64{1}, []int64{0, 1, 0, 1})
	a := find(m, dec(t, "6.283185307179586"))
	if len(a) != 2 || a[0].K+a[1].K != 3 {
		t.Errorf("integrator and mode: %+v", a)
	}
	// decayed within a tick: −1000 ± j100
	if a := find(model(t, []int64{1}, []int64{1010000, 2000, 1}), dec(t, "0.031415926535")); len(a) != 0 {
		t.Errorf("decayed: %+v", a)
	}
}

// TestForwardUnstable: only poles that were not unstable before are reported.
func TestForwardUnstable(t *testing.T) {
	m := model(t, []int64{1}, []int64{-3, 1})
	if a := MovedOutside(m, mustMap(t, m, "forward", big.NewRat(1, 1))); len(a) != 0 {
		t.Errorf("unstable before: %v", a)
	}
	m = model(t, []int64{1}, []int64{4, 0, 1}) // ±2j → 1 ± 2j
	if a := MovedOutside(m, mustMap(t, m, "forward", big.NewRat(1, 1))); len(a) != 2 || a[0].Z != 1+2i {
		t.Errorf("undamped: %v", a)
	}
	m = model(t, []int64{1}, []int64{0, 1, 1}) // integrator and −1: inside
	if a := MovedOutside(m, mustMap(t, m, "forward", big.NewRat(1, 1))); len(a) != 0 {
		t.Errorf("inside: %v", a)
	}
}
