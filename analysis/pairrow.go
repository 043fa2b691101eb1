package analysis

import "thinward/analysis/crystal"

// PairRow is one pair of one contrast, as pairs.csv holds it. Strength is on the
// axis named in Axis; DI is thin minus thick, Eps the same over the pooled local
// shell mean, Z over its standard uncertainty. Class is floor, middle, top or
// empty; Flags are words joined by "+". A number that does not exist is NaN.
//
// PhiThin and PhiThick are the rotation angles in degrees, NaN where observations of one
// position lie more than 5 degrees apart; TiltThin and TiltThick the mean angle between
// the beam and the slab normal over the observations, NaN where the angle at which the
// slab faces the beam is not known. SUThin and SUThick hold counting noise and the noise model,
// SUDI the deviations of single reflections that pairs have anyway too, and so does Z.
type PairRow struct {
	Crystal, Thin, Thick           string
	HKL                            crystal.HKL
	D                              float64
	PhiThin, PhiThick              float64
	TiltThin, TiltThick            float64
	NThin, NThick                  int
	JThin, SUThin, JThick, SUThick float64
	Strength                       float64
	Axis                           string
	InverseVariance                float64
	DI, SUDI, Eps, Z               float64
	Class, Flags                   string
}
