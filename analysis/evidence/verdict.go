package evidence

import (
	"fmt"
	"math"
)

// Verdict is what a check of the ledger comes to.
type Verdict int

// The verdicts, the zero value being the one that claims nothing.
const (
	NotKnown Verdict = iota
	Fine
	Caution
	Fails
)

// String returns the word used in files and reports.
func (v Verdict) String() string {
	switch v {
	case NotKnown:
		return "not known"
	case Fine:
		return "fine"
	case Caution:
		return "caution"
	case Fails:
		return "fails"
	}
	return fmt.Sprintf("Verdict(%d)", int(v))
}

// Finding is a figure with its verdict and the reason in words. Value is NaN
// where there is no figure.
type Finding struct {
	Value   float64
	Unit    string
	Verdict Verdict
	Why     string
}

// unknown is a finding without a figure.
func unknown(format string, args ...any) Finding {
	return Finding{Value: math.NaN(), Verdict: NotKnown, Why: fmt.Sprintf(format, args...)}
}

// Worse returns the graver of two verdicts; NotKnown is the mildest.
func Worse(a, b Verdict) Verdict { return max(a, b) }

// num writes a number of a sentence with three digits.
func num(v float64) string {
	if math.IsNaN(v) {
		return "unknown"
	}
	return fmt.Sprintf("%.3g", v)
}
