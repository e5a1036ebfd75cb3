// Package near compares numbers in tests and holds cited rows.
package near

import (
	"math"
	"testing"
)

// Rel fails the test unless |got - want| <= tol |want|, or both are the same infinity.
func Rel(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if got == want {
		return
	}
	if !(math.Abs(got-want) <= tol*math.Abs(want)) {
		t.Errorf("%s: got %.15g, want %.15g (relative tolerance %g)", what, got, want, tol)
	}
}

// Abs fails the test unless |got - want| <= tol.
func Abs(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g (tolerance %g)", what, got, want, tol)
	}
}
