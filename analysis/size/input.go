package size

// Input holds the pairs of one contrast as parallel columns, thin and thick on
// the common scale.
//
// Z is the strength of each reflection on the axis, intensity over local shell
// mean; NaN marks a reflection without one: it enters the shell means and
// nothing else. Shell numbers the resolution shells from 0 to Shells-1. VarThin
// and VarThick are variances at the expected intensity; they are needed by the
// curb (VarThin) and by PrecisionWeights, and may be nil otherwise. S2 is
// sin^2(theta)/lambda^2 in 1/A^2; nil makes the mean over all reflections the
// reference intensity in place of that of the lowest third in s^2.
//
// Optional columns, nil when absent: ThinA and ThinB, two independent halves of
// the thin position, whose product then replaces Thin^2 - VarThin; Exposure, the
// factor that turns the common-scale intensity into the count rate at which the
// thick position recorded the reflection; Precision, weights of the moments,
// which may depend on Z, S2 and shell-wise variances only.
type Input struct {
	Z                 []float64
	Thin, Thick       []float64
	VarThin, VarThick []float64
	Shell             []int32
	Shells            int
	S2                []float64
	ThinA, ThinB      []float64
	Exposure          []float64
	Precision         []float64
}

// Settings of the estimators; nil and zero fields mean the defaults.
type Settings struct {
	Level      float64   // of intervals; 0.95
	Clip       float64   // of the axis in Exchange, in shell means; 6
	Knots      []float64 // of the functions min(z, knot) in Moments; .3, 1, 3, 8
	Curb       CurbForm  // what the curb grows with; CurbCommon
	FlatShells bool      // Moments weights all shells alike; default false: by residual variance of the shell
}

// Interval is closed; an open end is an infinity.
type Interval struct{ Lo, Hi float64 }
