package zdomain

import (
	"steadytick/internal/dd"
	"steadytick/internal/lti"
)

// ErrorConstants returns Kp, Kv and Ka of m taken as a loop L: the limits of L,
// δ·L and δ²·L for δ → 0, δ = (z−1)/T. Exact and then rounded once where there is an exact form.
func (m Model) ErrorConstants() lti.Constants {
	if m.Exact == nil {
		return lti.ErrorConstants(lti.Leading(m.TF))
	}
	start, c := m.Exact.Laurent(1)
	return lti.ErrorConstants(start, dd.FromRat(c[0]))
}
