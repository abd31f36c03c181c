package sdomain

import (
	"fmt"
	"math/big"

	"steadytick/internal/exact"
)

// DelayError says that an operation on dead times has no result of the form
// Ratio·e^(−s·Delay) with Delay >= 0.
type DelayError struct {
	Op   string   // "sum", "division", "power" or "dead time"
	A, B *big.Rat // seconds; the dead times of the operands (B nil for a single one)
}

func (e *DelayError) Error() string {
	switch e.Op {
	case "sum":
		return fmt.Sprintf("a sum of terms with different dead times (%s s and %s s) is not supported", seconds(e.A), seconds(e.B))
	case "dead time":
		return fmt.Sprintf("dead time %s s is negative: the model would predict", seconds(e.A))
	}
	return fmt.Sprintf("%s by a model with dead time (%s s): the result would predict", e.Op, seconds(e.B))
}

// seconds prints short enough for a message.
func seconds(t *big.Rat) string {
	f, _ := t.Float64()
	return fmt.Sprintf("%.6g", f)
}

// Const returns the constant model c.
func Const(c *big.Rat) Model { return Model{exact.Const(c), new(big.Rat)} }

// S returns the model s, a differentiator.
func S() Model { return Model{exact.X(), new(big.Rat)} }

// Exp returns the dead time e^(−s·tau), tau in seconds. A negative tau is a *DelayError.
func Exp(tau *big.Rat) (Model, error) {
	if tau.Sign() < 0 {
		return Model{}, &DelayError{Op: "dead time", A: tau}
	}
	return Model{exact.Const(big.NewRat(1, 1)), new(big.Rat).Set(tau)}, nil
}

// WithDelay returns m with its dead time made longer by tau seconds. A negative sum
// is a *DelayError.
func (m Model) WithDelay(tau *big.Rat) (Model, error) {
	d := new(big.Rat).Add(m.delay(), tau)
	if d.Sign() < 0 {
		return Model{}, &DelayError{Op: "dead time", A: d}
	}
	return Model{m.Ratio, d}, nil
}

// checked returns the model when its size is within the bounds.
func checked(r exact.Ratio, delay *big.Rat) (Model, error) {
	if err := r.Check(); err != nil {
		return Model{}, err
	}
	return Model{r, new(big.Rat).Set(delay)}, nil
}

// Add returns m + q, with shared denominator factors counted once (exact.Ratio.Add).
// Different dead times are a *DelayError (unless one term is zero), a result too large an *exact.SizeError.
func (m Model) Add(q Model) (Model, error) {
	switch {
	case m.Ratio.IsZero():
		return checked(q.Ratio, q.delay())
	case q.Ratio.IsZero():
		return checked(m.Ratio, m.delay())
	case m.delay().Cmp(q.delay()) != 0:
		return Model{}, &DelayError{Op: "sum", A: m.delay(), B: q.delay()}
	}
	r := m.Ratio.Add(q.Ratio)
	if r.IsZero() {
		return Const(new(big.Rat)), nil
	}
	return checked(r, m.delay())
}

// Sub returns m − q, as Add does.
func (m Model) Sub(q Model) (Model, error) { return m.Add(q.Neg()) }

// Neg returns −m.
func (m Model) Neg() Model { return Model{m.Ratio.Neg(), m.delay()} }

// Mul returns m·q; dead times add. A result too large is an *exact.SizeError.
func (m Model) Mul(q Model) (Model, error) {
	r := m.Ratio.Mul(q.Ratio)
	if r.IsZero() {
		return Const(new(big.Rat)), nil
	}
	return checked(r, new(big.Rat).Add(m.delay(), q.delay()))
}

// Div returns m/q. Errors: exact.ErrZeroDivision; *DelayError when q has a dead
// time; *exact.SizeError.
func (m Model) Div(q Model) (Model, error) {
	if q.delay().Sign() > 0 {
		return Model{}, &DelayError{Op: "division", A: m.delay(), B: q.delay()}
	}
	r, err := m.Ratio.Div(q.Ratio)
	if err != nil {
		return Model{}, err
	}
	if r.IsZero() {
		return Const(new(big.Rat)), nil
	}
	return checked(r, m.delay())
}

// Pow returns m^n. Errors: *DelayError for n < 0 and a dead time; those of exact.Ratio.Pow.
func (m Model) Pow(n int) (Model, error) {
	if n < 0 && m.delay().Sign() > 0 {
		return Model{}, &DelayError{Op: "negative power", A: m.delay(), B: m.delay()}
	}
	r, err := m.Ratio.Pow(n)
	if err != nil {
		return Model{}, err
	}
	return checked(r, new(big.Rat).Mul(m.delay(), new(big.Rat).SetInt64(int64(n))))
}
