package analysis

// IntakeDetails is all that can be said of a series before any scaling.
type IntakeDetails struct {
	Positions []IntakeResult   `json:"positions"`
	Common    []CommonResult   `json:"common"`
	Remarks   []IntakeRemark   `json:"remarks"`
	Laue      *LaueResult      `json:"laue"`
	Centring  []CentringResult `json:"centring"`
	Turns     []TurnResult     `json:"turns"`
	Indexing  []IndexingResult `json:"indexing"`
	Warnings  []WarningResult  `json:"warnings"`
}

// CellAgreement compares the cell that the files of a position give with that of
// the series, edge by edge, after the re-indexing that the manifest asks for:
// LengthPercent is the largest |a1 - a2| over their mean, AngleDeg the largest
// difference of an angle, and Length and Angle say of which. Of several files the
// farthest counts. Within the tolerances the cells agree; beyond them the series is
// refused. Given is false, the differences NaN, where no file of the position
// gives a cell.
type CellAgreement struct {
	Given            bool    `json:"given"`
	LengthPercent    float64 `json:"length_percent"`
	Length           string  `json:"length,omitempty"`
	AngleDeg         float64 `json:"angle_deg"`
	Angle            string  `json:"angle,omitempty"`
	TolerancePercent float64 `json:"tolerance_percent"`
	ToleranceDeg     float64 `json:"tolerance_deg"`
	Why              string  `json:"why,omitempty"`
}

// SigmaResult says whether the reported uncertainties of a position look like
// uncertainties, before scaling; the formulas stand at intensity.Sigmas.
type SigmaResult struct {
	Same         float64 `json:"share_of_one_value"`
	Proportional float64 `json:"share_proportional_to_intensity"`
	Ceiling      float64 `json:"i_over_sigma_99th_percentile"`
	Chi2         float64 `json:"chi2_of_near_equivalents"`
	Chi2SE       float64 `json:"chi2_se"`
	Pairs        int     `json:"near_pairs"`
	AnyAngle     bool    `json:"at_any_angle"`
	Why          string  `json:"why,omitempty"`
}

// CommonResult is the overlap of two positions of the series: the unique allowed
// reflections measured in both, and their share of those of each. Strength is the
// mean of I/epsilon over its local shell mean in a position for the common
// reflections, which is 1 when they are like all of that position; its standard
// error is that of a sample without replacement, sd/sqrt(n) sqrt(1 - share).
// DCommon and DAll are the median spacings in angstrom of the common reflections
// and of those in either.
type CommonResult struct {
	Crystal      string  `json:"crystal"`
	Position     string  `json:"position"`
	WithCrystal  string  `json:"with_crystal"`
	WithPosition string  `json:"with_position"`
	Common       int     `json:"common"`
	Share        float64 `json:"share"`
	WithShare    float64 `json:"with_share"`
	Strength     float64 `json:"strength"`
	StrengthSE   float64 `json:"strength_se"`
	With         float64 `json:"with_strength"`
	WithSE       float64 `json:"with_strength_se"`
	DCommon      float64 `json:"d_common_a"`
	DAll         float64 `json:"d_all_a"`
	Why          string  `json:"why,omitempty"`
}

// IntakeRemark counts what does not come through as it was read. Kind is
//
//	unusable  rows that cannot be used, for the reason in Why; File and FirstLine say where
//	copies    rows that repeat another one and were joined with it
//	slices    rows that were summed with others to one observation
//	excluded  observations that the manifest sets aside
//	merged    reflections that stand once, in a list that looks merged
type IntakeRemark struct {
	Crystal   string `json:"crystal"`
	Position  string `json:"position"`
	Kind      string `json:"kind"`
	Count     int    `json:"count"`
	Why       string `json:"why"`
	File      string `json:"file,omitempty"`
	FirstLine int    `json:"first_line,omitempty"`
}

// CentringResult asks of one kind of lattice centring whether the reflections
// that it forbids are there. Stated says that the space group has it. N of them
// were measured, counted over positions, where Expected would be if they were
// recorded like the others. Ratio is the mean of I/epsilon of them over the local
// mean of the others, over all positions, and SU its standard uncertainty.
// Centring absences are exact and multiple scattering does not fill them, so that
// a ratio well above 0 says that there is no such centring.
type CentringResult struct {
	Centring  string  `json:"centring"`
	Condition string  `json:"condition"`
	Stated    bool    `json:"stated"`
	N         int     `json:"n"`
	Expected  float64 `json:"expected"`
	Ratio     float64 `json:"ratio"`
	SU        float64 `json:"su"`
	Verdict   string  `json:"verdict"`
	Why       string  `json:"why"`
}

// TurnResult asks whether the rotation angles of a position are those of one
// rotation of the crystal, and whether they are counted as in the thinnest position
// of the same crystal. MisfitDeg is the rms angle by which reflections miss the
// plane across the beam at their angle. AxisDeg is the angle between the
// rotation axes in the frame of the crystal, ZeroDeg what is to be added to the angles of
// this position, Reversed that they run the other way and are to be negated before. Reindex is a change
// of indices by a symmetry of the Laue class after which both agree, empty for none.
// What the step before has mended by common indices no longer shows here.
type TurnResult struct {
	Crystal   string  `json:"crystal"`
	Position  string  `json:"position"`
	MisfitDeg float64 `json:"misfit_deg"`
	AxisDeg   float64 `json:"axis_deg"`
	ZeroDeg   float64 `json:"zero_deg"`
	Reversed  bool    `json:"reversed"`
	Reindex   string  `json:"reindex,omitempty"`
	Verdict   string  `json:"verdict"`
	Why       string  `json:"why"`
}
