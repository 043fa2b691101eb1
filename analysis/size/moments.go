package size

import (
	"errors"

	"gonum.org/v1/gonum/mat"
)

// Model says which of exchange, curb and offset are fitted.
type Model int

const (
	M   Model = iota // exchange
	MQ               // exchange and curb
	MQO              // exchange, curb and offset
)

// String gives "(m)", "(m,q)" or "(m,q,o)".
func (m Model) String() string { return [...]string{"(m)", "(m,q)", "(m,q,o)"}[m] }

// CurbForm says what the curb grows with.
type CurbForm int

const (
	CurbCommon   CurbForm = iota // intensity on the common scale over its mean in the lowest third of s^2
	CurbStrength                 // strength, intensity over the local shell mean
	CurbRate                     // count rate, Exposure times intensity
)

// Value is an estimate with its standard error and interval; Value and SE are
// NaN and the interval unbounded where it is not estimable.
type Value struct{ Value, SE, Lo, Hi float64 }

// Fit is the outcome of Moments.
type Fit struct {
	Model     Model
	Curb      CurbForm
	M, Q, O   Value         // Q and O are zero Values where the model has none
	Reference float64       // intensity units of O: its mean in the thick position over the lowest third of s^2
	Cov       *mat.SymDense // of (M), (M, Q) or (M, Q, O)
	J, JP     float64       // over-identification
	JDF       int
	F         float64 // first stage of the exchange
	N, DF     float64
	Level     float64
	Estimable bool
	Why       string
}

// Moments fits a model by two-step moments.
func Moments(in *Input, w []float64, model Model, set *Settings) (*Fit, error) {
	return nil, errors.New("size: Moments: to be filled in")
}

// Leads returns the model that leads: MQO where shell means of the thick
// position span more than five times, else MQ; span is max over min.
func Leads(in *Input, w []float64) (model Model, span float64, err error) {
	return 0, 0, errors.New("size: Leads: to be filled in")
}
