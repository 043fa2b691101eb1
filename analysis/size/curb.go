package size

import "errors"

// CurbRival is one form of the curb in a CurbComparison.
type CurbRival struct {
	Form    CurbForm
	Fit     *Fit
	J       float64 // under the weight matrix common to all forms
	Behind  float64 // J less that of the best
	Refused bool    // Behind exceeds the 95 % point of chi-square with one degree of freedom
}

// CurbComparison sets the forms of the curb side by side.
type CurbComparison struct {
	Rivals []CurbRival
	Best   CurbForm
	Told   bool // every other form is refused
	Why    string
}

// CompareCurbs fits the model with each form of the curb on the same moments.
func CompareCurbs(in *Input, w []float64, model Model, set *Settings) (*CurbComparison, error) {
	return nil, errors.New("size: CompareCurbs: to be filled in")
}
