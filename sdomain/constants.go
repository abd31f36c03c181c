package sdomain

import (
	"steadytick/internal/dd"
	"steadytick/internal/lti"
)

// ErrorConstants returns Kp, Kv and Ka of m taken as a loop L(s), the limits of L, s·L
// and s²·L for s → 0, exact and then rounded once.
func (m Model) ErrorConstants() lti.Constants {
	start, c := m.Ratio.Laurent(1)
	return lti.ErrorConstants(start, dd.FromRat(c[0]))
}
