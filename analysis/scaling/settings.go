package scaling

import (
	"fmt"
	"math"
)

// Model says which parts of the scale are fitted.
type Model int

// The models, from the fullest to the plainest.
const (
	Full     Model = iota // K_p(phi) and B_p
	PhiOnly               // K_p(phi), every B is 0
	BOnly                 // one constant and B_p a position
	Constant              // one constant a position
)

// String returns the name of the model.
func (m Model) String() string {
	return nameOf([]string{"phi and B", "phi only", "B only", "constant"}, int(m), "model")
}

// Anchor says which reflections determine the scale; all are put on it.
type Anchor int

// The anchors. Halves of strength are taken by J over its local shell mean from
// a first fit with all reflections, halves of resolution at the median s^2.
const (
	AnchorAll Anchor = iota
	AnchorWeak
	AnchorStrong
	AnchorLow
	AnchorHigh
)

// String returns the name of the anchor.
func (a Anchor) String() string {
	return nameOf([]string{"all", "weak half", "strong half", "low resolution", "high resolution"}, int(a), "anchor")
}

// Weighting says where the variances in the weights come from.
type Weighting int

// WeightExpected takes the variance at the expected intensity together with a
// noise model fitted on the way; WeightReported takes Var as it is given, which
// lets weighted means of weak reflections fall (use it for comparison only).
const (
	WeightExpected Weighting = iota
	WeightReported
)

// String returns the name of the weighting.
func (w Weighting) String() string {
	return nameOf([]string{"expected", "reported"}, int(w), "weighting")
}

// Covariance says how the parameter covariance is computed.
type Covariance int

// CovRobust is the sandwich with whole reflections as units, which holds when
// the variances are wrong or equivalents deviate together; CovModel is the
// inverse of the normal matrix.
const (
	CovRobust Covariance = iota
	CovModel
)

// String returns the name of the covariance.
func (c Covariance) String() string {
	return nameOf([]string{"robust", "model"}, int(c), "covariance")
}

func nameOf(names []string, i int, kind string) string {
	if i < 0 || i >= len(names) {
		return fmt.Sprintf("unknown %s %d", kind, i)
	}
	return names[i]
}

// Settings steer Estimate. The zero value, and nil, mean the defaults named at
// each field.
type Settings struct {
	KnotDeg      float64    // knot spacing of the splines in degrees; 0 means 10
	KnotFrames   float64    // knot spacing in frames where frames stand for the angle; 0 means 20
	FrameAsAngle bool       // Phi of positions without angles holds frame numbers and may carry a curve of its own
	Model        Model      // default Full
	Anchor       Anchor     // default AnchorAll
	Weighting    Weighting  // default WeightExpected
	Covariance   Covariance // default CovRobust
	TailDF       float64    // degrees of freedom of the Student-t weights; 0 means 5, +Inf plain least squares
	MaxIter      int        // 0 means 100
	Tolerance    float64    // largest shift over its standard error at the end; 0 means 1e-4
	MaxLnKSE     float64    // a curve softer than this is set to a constant; 0 means 0.1
	RidgeLnK     float64    // spread of c(phi) about a constant assumed by its ridge; 0 means 0.5
	OutlierBelow float64    // relative weight under which an observation is listed; 0 means 0.1
	OutlierShare float64    // share of listed observations that gives a caution; 0 means 0.01
	MinOverlap   int        // fewer reflections shared with other positions give a caution; 0 means 50
	Workers      int        // 0 means all processors; the result does not depend on it
}

func (s *Settings) filled() (Settings, error) {
	var o Settings
	if s != nil {
		o = *s
	}
	for _, f := range []struct {
		name string
		v    *float64
		def  float64
	}{
		{"KnotDeg", &o.KnotDeg, 10}, {"KnotFrames", &o.KnotFrames, 20}, {"TailDF", &o.TailDF, 5},
		{"Tolerance", &o.Tolerance, 1e-4}, {"MaxLnKSE", &o.MaxLnKSE, 0.1}, {"RidgeLnK", &o.RidgeLnK, 0.5},
		{"OutlierBelow", &o.OutlierBelow, 0.1}, {"OutlierShare", &o.OutlierShare, 0.01},
	} {
		if *f.v == 0 {
			*f.v = f.def
		}
		if !(*f.v > 0) {
			return o, fmt.Errorf("scaling: setting %s is %g, must be positive", f.name, *f.v)
		}
	}
	if o.TailDF < 1 {
		return o, fmt.Errorf("scaling: setting TailDF is %g, must be at least 1", o.TailDF)
	}
	if math.IsInf(o.KnotDeg, 0) || math.IsInf(o.KnotFrames, 0) {
		return o, fmt.Errorf("scaling: knot spacing must be finite (use the model B only or constant)")
	}
	if o.MaxIter < 0 || o.MinOverlap < 0 {
		return o, fmt.Errorf("scaling: settings MaxIter %d and MinOverlap %d must not be negative", o.MaxIter, o.MinOverlap)
	}
	if o.MaxIter == 0 {
		o.MaxIter = 100
	}
	if o.MinOverlap == 0 {
		o.MinOverlap = 50
	}
	if o.Model < Full || o.Model > Constant || o.Anchor < AnchorAll || o.Anchor > AnchorHigh {
		return o, fmt.Errorf("scaling: %v, %v", o.Model, o.Anchor)
	}
	return o, nil
}
