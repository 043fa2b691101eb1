package difference

import (
	"thinward/analysis/intensity"
)

// Matching says how two positions are brought together.
type Matching int

const (
	// MatchAuto matches single observations where that is allowed and leaves
	// enough, and merges otherwise.
	MatchAuto Matching = iota
	// MatchAlways matches or fails.
	MatchAlways
	// MatchNever merges each position first.
	MatchNever
)

// Settings are the choices of Pair; nil or zero fields mean the default.
type Settings struct {
	Matching Matching
	// SameCrystal says that both positions lie on one crystal; only then may
	// observations be matched.
	SameCrystal bool
	// AngleToleranceDeg is the largest difference of angle of a matched pair,
	// one frame width; 0 means 1 degree (common practice, no source).
	AngleToleranceDeg float64
	// LeastMatched is the share of the merged pairs that matching must keep to
	// be used in automatic mode; 0 means 0.5.
	LeastMatched float64
	// Shells is the number of equal-count shells for local means; 0 means one
	// for every 75 pairs, between 1 and 20.
	Shells int
	// TailDF is the number of degrees of freedom of the Student t in the fit of
	// VarD; 0 means 4.
	TailDF float64
}

// Counts says how many of what went into the pairs.
type Counts struct {
	ThinObservations, ThickObservations int // given
	ThinUnique, ThickUnique             int // measured, allowed
	Common                              int // measured in both, allowed
	MatchedObservations                 int // couples of observations, or of means of repeats, at one angle
	Absent                              int // forbidden reflections left out
	Unusable                            int // in shells without a positive mean
	Pairs                               int
	// Thin and Thick say where the observations of either position went.
	Thin, Thick SideCounts
}

// SideCounts says what became of the observations of one position; its numbers add
// up to those given.
type SideCounts struct {
	Absent        int // of forbidden reflections
	WithoutWeight int // of infinite variance
	OutsideRange  int // outside the angles that both positions cover, when matched
	Alone         int // without a partner at their angle, or of reflections the other position lacks when merged
	Unusable      int // in pairs whose shell has no positive mean
	Used          int // in the pairs
}

// Pairs holds one entry a reflection measured in both positions. Thin and
// Thick are on the common scale, VarThin and VarThick the variances given for
// them, VarD the variance of their difference refitted from the differences.
// Shell numbers the equal-count resolution shells; MeanThin, MeanThick and
// MeanPooled are the local means at each pair: the mean of J/epsilon over the
// pair's shell, times its own epsilon, so that Thin/MeanThin is a strength with
// epsilon divided out. All slices are parallel, in catalogue order.
type Pairs struct {
	Unique            []int32
	S2                []float64
	Epsilon           []float64
	Centric           []bool
	Thin, Thick       []float64
	VarThin, VarThick []float64
	VarD              []float64
	NThin, NThick     []int32
	// Phi is the mean angle of the thin observations behind the pair, in
	// degrees, NaN without angles. Equivalents may lie far apart.
	Phi                 []float64
	Shell               []int32
	Shells              int
	MeanThin, MeanThick []float64
	MeanPooled          []float64

	Matched bool
	// ExtraD is b_D of VarD = VarThin + VarThick + b_D |b_D| J^2 (a negative one
	// says that the pairs scatter less than the variances given), ExtraDLo and
	// ExtraDHi its 95 % limits.
	ExtraD, ExtraDLo, ExtraDHi float64
	Counts                     Counts
	Warnings                   []intensity.Warning

	source source
}

// Len returns the number of pairs.
func (p *Pairs) Len() int { return len(p.Thin) }

// D returns thin minus thick of each pair.
func (p *Pairs) D() []float64 {
	d := make([]float64, p.Len())
	for i := range d {
		d[i] = p.Thin[i] - p.Thick[i]
	}
	return d
}

// Eps returns the differences in eps units, (Thin - Thick) / MeanPooled.
func (p *Pairs) Eps() []float64 {
	d := p.D()
	for i := range d {
		d[i] /= p.MeanPooled[i]
	}
	return d
}

// OverEpsilon returns the intensities with epsilon divided out, and their
// variances by its square: what estimators take that know shells but no
// symmetry.
func (p *Pairs) OverEpsilon() (thin, thick, varThin, varThick []float64) {
	n := p.Len()
	thin, thick, varThin, varThick = make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	for i, e := range p.Epsilon {
		thin[i], thick[i] = p.Thin[i]/e, p.Thick[i]/e
		varThin[i], varThick[i] = p.VarThin[i]/(e*e), p.VarThick[i]/(e*e)
	}
	return thin, thick, varThin, varThick
}

// EpsVar returns the variance of Eps, VarD / MeanPooled^2.
func (p *Pairs) EpsVar() []float64 {
	v := make([]float64, p.Len())
	for i := range v {
		v[i] = p.VarD[i] / (p.MeanPooled[i] * p.MeanPooled[i])
	}
	return v
}

// Strengths are positions of reflections on one axis, parallel to the pairs;
// NaN where the axis has nothing to say of a reflection. N counts the others.
type Strengths struct {
	Axis Axis
	Z    []float64
	Var  []float64 // of Z by the variances given, +Inf where Z is NaN
	N    int
	// Correlation, for AxisCrystals and AxisThird, is that with the strength of
	// the pair itself, over shells weighted by how little noise they carry;
	// PlainCorrelation has no weights. Both NaN for other axes.
	Correlation, PlainCorrelation float64
	Warnings                      []intensity.Warning
}
