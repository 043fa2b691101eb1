// Package floatcmp is the one comparer of floating-point results in tests. A
// bare |got-want| > tol is false for NaN, so a NaN would pass; here it fails.
package floatcmp

import (
	"math"
	"testing"
)

// Equal reports whether got is within abs of want, or within rel of |want|.
// NaN equals only NaN; infinities equal only themselves.
func Equal(got, want, abs, rel float64) bool {
	if math.IsNaN(got) || math.IsNaN(want) {
		return math.IsNaN(got) && math.IsNaN(want)
	}
	if got == want {
		return true
	}
	if math.IsInf(got, 0) || math.IsInf(want, 0) {
		return false
	}
	d := math.Abs(got - want)
	return d <= abs || d <= rel*math.Abs(want)
}

// Check fails the test when Equal(got, want, abs, rel) is false.
func Check(t testing.TB, what string, got, want, abs, rel float64) {
	t.Helper()
	if !Equal(got, want, abs, rel) {
		t.Errorf("%s: got %.12g, want %.12g (abs %g, rel %g)", what, got, want, abs, rel)
	}
}

// CheckSlice compares element by element and reports the first few that differ.
func CheckSlice(t testing.TB, what string, got, want []float64, abs, rel float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Errorf("%s: length %d, want %d", what, len(got), len(want))
		return
	}
	bad := 0
	for i := range got {
		if !Equal(got[i], want[i], abs, rel) {
			t.Errorf("%s[%d]: got %.12g, want %.12g (abs %g, rel %g)", what, i, got[i], want[i], abs, rel)
			if bad++; bad == 5 {
				return
			}
		}
	}
}
