package analysis

import "thinward/analysis/crystal"

// PairRow is one pair of one contrast, as pairs.csv holds it. Strength is on the
// axis named in Axis; DI is thin minus thick, Eps the same over the pooled local
// shell mean, Z over its standard uncertainty. Class is floor, middle, top or
// empty; Flags are words joined by "+". A number that does not exist is NaN.
type PairRow struct {
	Crystal, Thin, Thick           string
	HKL                            crystal.HKL
	D                              float64
	PhiThin, PhiThick              float64
	NThin, NThick                  int
	JThin, SUThin, JThick, SUThick float64
	Strength                       float64
	Axis                           string
	InverseVariance                float64
	DI, SUDI, Eps, Z               float64
	Class, Flags                   string
}
