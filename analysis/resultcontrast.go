package analysis

// ContrastResult is everything about one pair of positions.
type ContrastResult struct {
	Crystal       string           `json:"crystal"`
	ThickCrystal  string           `json:"thick_crystal,omitempty"`
	Thin          string           `json:"thin"`
	Thick         string           `json:"thick"`
	ThicknessNM   [2]float64       `json:"thickness_nm"`
	Primary       bool             `json:"primary"`
	Pairs         int              `json:"pairs"`
	Matched       bool             `json:"matched"`
	StrengthAxis  string           `json:"strength_axis"`
	AxisAgreement float64          `json:"axis_correlation"`
	Correlation   Correlation      `json:"correlation"`
	MomentRatio   MomentRatio      `json:"moment_ratio"`
	Strength      Curve            `json:"strength"`
	AngleBlocks   *AngleBlocks     `json:"angle_blocks,omitempty"`
	Resolution    Resolution       `json:"resolution"`
	Classes       Classes          `json:"classes"`
	Exchange      Exchange         `json:"exchange"`
	Curb          Curb             `json:"curb"`
	Offset        Offset           `json:"offset"`
	OverIdent     OverIdent        `json:"over_identification"`
	Models        []Model          `json:"models"`
	Giants        []Giant          `json:"giants"`
	CurbForms     []CurbForm       `json:"curb_forms,omitempty"`
	Bracket       Bracket          `json:"bracket"`
	MinimumM      float64          `json:"minimum_m"`
	Naive         map[string]Naive `json:"naive"`
	Axes          []AxisResult     `json:"axes"`
	PairNoise     float64          `json:"pair_noise"`
	Warnings      []WarningResult  `json:"warnings"`
}

// Correlation is the true correlation of intensities between two positions,
// noise removed by halves.
type Correlation struct {
	R   float64 `json:"r"`
	Lo  float64 `json:"lo"`
	Hi  float64 `json:"hi"`
	Why string  `json:"why,omitempty"`
}

// MomentRatio is 1 - sqrt(V_thick/V_thin) with V the signal variance of
// normalised intensities.
type MomentRatio struct {
	M   float64 `json:"m"`
	Lo  float64 `json:"lo"`
	Hi  float64 `json:"hi"`
	Why string  `json:"why,omitempty"`
}

// Curve is a banded curve over strength. Mean and its bands are in eps units. P is joint
// over windows along strength and along resolution; PStrength and PResolution are the
// smallest of either kind, adjusted for all windows of both (single-step maximum: Westfall &
// Young 1993), so that P is the smaller of the two. NaN where nothing was tested.
type Curve struct {
	Grid        []float64 `json:"grid"`
	Mean        []float64 `json:"mean"`
	Lo          []float64 `json:"lo"`
	Hi          []float64 `json:"hi"`
	LoSim       []float64 `json:"lo_sim"`
	HiSim       []float64 `json:"hi_sim"`
	P           float64   `json:"p"`
	PStrength   float64   `json:"p_strength"`
	PResolution float64   `json:"p_resolution"`
	Window      int       `json:"window"`
	Level       float64   `json:"level"`
	Why         string    `json:"why,omitempty"`
}

// Resolution is ln(<I_thick>/<I_thin>) by shell of 1/d^2 with one overall scale,
// and the difference of B that a straight line through it means. FittedB is the
// difference of B that the scale took off, with its standard error; Reconciled says in words
// what the two have to do with each other.
type Resolution struct {
	D          []float64 `json:"d_a"`
	LogRatio   []float64 `json:"log_ratio"`
	Lo         []float64 `json:"lo"`
	Hi         []float64 `json:"hi"`
	DeltaB     float64   `json:"delta_b"`
	DeltaBLo   float64   `json:"delta_b_lo"`
	DeltaBHi   float64   `json:"delta_b_hi"`
	Share      float64   `json:"share_of_b"`
	Remainder  []float64 `json:"remainder"`
	FittedB    float64   `json:"fitted_b"`
	FittedBSE  float64   `json:"fitted_b_se"`
	Reconciled string    `json:"reconciled,omitempty"`
	Why        string    `json:"why,omitempty"`
}

// Classes are the three classes of strength.
type Classes struct {
	Floor  Class `json:"floor"`
	Middle Class `json:"middle"`
	Top    Class `json:"top"`
}

// Class is one class: N pairs of mean true strength Strength, their contrast
// Eps, and the exchange that this contrast alone would mean.
type Class struct {
	N        int     `json:"n"`
	Strength float64 `json:"strength"`
	Eps      float64 `json:"eps"`
	Lo       float64 `json:"lo"`
	Hi       float64 `json:"hi"`
	M        float64 `json:"m"`
	MLo      float64 `json:"m_lo"`
	MHi      float64 `json:"m_hi"`
	Why      string  `json:"why,omitempty"`
}

// Exchange is the fraction of intensity moved from strong to weak.
type Exchange struct {
	M     float64 `json:"m"`
	Lo    float64 `json:"lo"`
	Hi    float64 `json:"hi"`
	SE    float64 `json:"se"`
	Model string  `json:"model"`
	F     float64 `json:"f"`
	Why   string  `json:"why,omitempty"`
}

// Curb is the loss of the strongest that grows with their intensity.
type Curb struct {
	Q   float64 `json:"q"`
	Lo  float64 `json:"lo"`
	Hi  float64 `json:"hi"`
	Why string  `json:"why,omitempty"`
}

// Offset is an additive constant in the thick position.
type Offset struct {
	O   float64 `json:"o"`
	Lo  float64 `json:"lo"`
	Hi  float64 `json:"hi"`
	Why string  `json:"why,omitempty"`
}

// OverIdent is the test whether the fitted numbers describe the curve.
type OverIdent struct {
	J  float64 `json:"j"`
	DF int     `json:"df"`
	P  float64 `json:"p"`
}

// Model is one of the fits (instrument), (m), (m,q), (m,q,o).
type Model struct {
	Model string   `json:"model"`
	M     Interval `json:"m"`
	Q     Interval `json:"q"`
	O     Interval `json:"o"`
	JP    float64  `json:"over_identification_p"`
	F     float64  `json:"f"`
}

// Giant is m with the strongest reflections left out.
type Giant struct {
	Above float64  `json:"above"`
	N     int      `json:"n"`
	M     Interval `json:"m"`
}

// CurbForm is the curb under one of its three forms.
type CurbForm struct {
	Form string   `json:"form"`
	Q    Interval `json:"q"`
	J    float64  `json:"j"`
	Why  string   `json:"why,omitempty"`
	// Refused says that the data refuse this form against the best.
	Refused bool `json:"refused"`
}

// Bracket holds m from halves of the positions themselves, by the leading model and by
// one slope. Lo to Hi is the hull of all four intervals. It holds m where the deviations of
// the two positions are unrelated, and is without an end (infinite) where one of the
// four cannot be had.
type Bracket struct {
	Lo float64 `json:"lo"`
	Hi float64 `json:"hi"`
	// Thin and Thick are by the leading model. With q in it neither lies on a known side
	// of m: the deviations of a position look like a curb.
	Thin  Interval `json:"half_of_thin"`
	Thick Interval `json:"half_of_thick"`
	Why   string   `json:"why,omitempty"`
	// ThinSlope and ThickSlope are by the instrument, one slope. What a position
	// deviates by and the other does not takes the first up and the second down; curb
	// and offset, which it reads as exchange, take both up.
	ThinSlope  Interval `json:"half_of_thin_one_slope"`
	ThickSlope Interval `json:"half_of_thick_one_slope"`
}

// Naive is what a naive axis shows and what noise alone would show on it: the
// mean square of the z-scores of 20 bins by that axis, 1 when flat.
type Naive struct {
	Score       float64   `json:"score"`
	GhostScore  float64   `json:"ghost_score"`
	Correlation float64   `json:"ghost_correlation"`
	Explained   float64   `json:"ghost_share"`
	Grid        []float64 `json:"grid"`
	Mean        []float64 `json:"mean"`
	Ghost       []float64 `json:"ghost"`
}

// AxisResult is m on one strength axis, beside the leading one.
type AxisResult struct {
	Axis   string   `json:"axis"`
	N      int      `json:"n"`
	M      Interval `json:"m"`
	Delta  Interval `json:"difference_from_leading"`
	P      float64  `json:"p"`
	Tip    float64  `json:"tipping_ratio"`
	Remark string   `json:"remark,omitempty"`
}
