package analysis

import "fmt"

// Schema names the layout of a Result; within one major number fields are only
// added.
const Schema = "thinward.result/1"

// Result is every number a report shows, as plain data. Not-a-number stands for
// "not estimable" and is explained by the Why beside it; an infinite end is an
// interval open to that side.
type Result struct {
	Schema        string           `json:"schema"`
	Series        string           `json:"series"`
	Seed          uint64           `json:"seed"`
	Inputs        []InputResult    `json:"inputs"`
	Intake        []IntakeResult   `json:"intake"`
	Common        []CommonResult   `json:"common_reflections,omitempty"`
	Remarks       []IntakeRemark   `json:"intake_remarks,omitempty"`
	Centring      []CentringResult `json:"centring,omitempty"`
	Turns         []TurnResult     `json:"turns,omitempty"`
	Indexing      []IndexingResult `json:"indexing,omitempty"`
	Scaling       []ScalingResult  `json:"scaling"`
	Contrasts     []ContrastResult `json:"contrasts"`
	Forbidden     []Forbidden      `json:"forbidden"`
	Quality       []Quality        `json:"quality,omitempty"`
	Distributions []Distribution   `json:"distributions,omitempty"`
	FriedelMates  []FriedelMates   `json:"friedel_mates,omitempty"`
	Crystals      *CrystalsResult  `json:"crystals,omitempty"`
	Thickness     *ThicknessResult `json:"thickness,omitempty"`
	Controls      []ControlResult  `json:"controls,omitempty"`
	Ledger        []LedgerEntry    `json:"ledger"`
	Specification []Specification  `json:"specification,omitempty"`
	Expectation   *Expectation     `json:"expectation,omitempty"`
	Matters       []Matters        `json:"matters,omitempty"`
	Answers       []Answer         `json:"answers"`
	Warnings      []WarningResult  `json:"warnings"`
	Environment   *Environment     `json:"environment,omitempty"`
	Timing        []StepTime       `json:"timing,omitempty"`
}

// InputResult is one file with what came out of it.
type InputResult struct {
	Path         string         `json:"path"`
	SHA256       string         `json:"sha256"`
	Crystal      string         `json:"crystal"`
	Position     string         `json:"position"`
	Rows         int            `json:"rows"`
	Observations int            `json:"observations"`
	SetAside     map[string]int `json:"set_aside,omitempty"`
}

// IntakeResult describes one position before any scaling.
type IntakeResult struct {
	Crystal      string    `json:"crystal"`
	Position     string    `json:"position"`
	ThicknessNM  float64   `json:"thickness_nm"`
	Rows         int       `json:"rows"`
	Observations int       `json:"observations"`
	RowsAs       string    `json:"rows_as"`
	Unique       int       `json:"unique"`
	Multiplicity float64   `json:"multiplicity"`
	Completeness float64   `json:"completeness"`
	DMin         float64   `json:"d_min_a"`
	DMax         float64   `json:"d_max_a"`
	AngleLo      float64   `json:"angle_lo_deg"`
	AngleHi      float64   `json:"angle_hi_deg"`
	AngleGap     float64   `json:"angle_gap_deg"`
	MeanISigma   float64   `json:"mean_i_over_sigma"`
	Negative     []int     `json:"negative_observed"`
	NegativeExp  []float64 `json:"negative_expected"`
	NearZero     [2]int    `json:"within_half_sigma_below_and_above_zero"`
	RMeas        float64   `json:"r_meas"`
	RPim         float64   `json:"r_pim"`
	CCHalf       float64   `json:"cc_half"`
	Overlap      float64   `json:"overlap_with_thinnest"`
	// InOthers is the share of the unique reflections that another crystal has too;
	// NaN with one crystal.
	InOthers float64 `json:"share_in_other_crystals"`
	// CommonDMin is the resolution that every position of the series reaches, and
	// CompletenessCommon the completeness to it.
	CommonDMin         float64       `json:"common_d_min_a"`
	CompletenessCommon float64       `json:"completeness_to_common_limit"`
	Cell               CellAgreement `json:"cell"`
	Sigmas             SigmaResult   `json:"sigmas"`
	Excluded           int           `json:"excluded"`
	Truncated          string        `json:"truncated,omitempty"`
	Why                string        `json:"why,omitempty"`
}

// ScalingResult is the scale and the noise model of one position. LnK is the
// mean of ln K over its observations, B in square angstrom; both relative to the
// thinnest position. A multiplies the reported sigma, BNoise is the part of the
// error that is proportional to the intensity.
type ScalingResult struct {
	Crystal   string    `json:"crystal"`
	Position  string    `json:"position"`
	B         float64   `json:"b"`
	BSE       float64   `json:"b_se"`
	LnK       float64   `json:"lnk"`
	A         float64   `json:"a"`
	ALo       float64   `json:"a_lo"`
	AHi       float64   `json:"a_hi"`
	BNoise    float64   `json:"b_noise"`
	BNoiseLo  float64   `json:"b_noise_lo"`
	BNoiseHi  float64   `json:"b_noise_hi"`
	Rejected  int       `json:"rejected"`
	Constant  bool      `json:"constant"`
	CurveDeg  []float64 `json:"curve_deg,omitempty"`
	CurveLnK  []float64 `json:"curve_lnk,omitempty"`
	ChiBefore float64   `json:"chi2_before"`
	ChiAfter  float64   `json:"chi2_after"`
	Why       string    `json:"why,omitempty"`
}

// Interval is an estimate with the ends of its interval.
type Interval struct {
	Value float64 `json:"value"`
	Lo    float64 `json:"lo"`
	Hi    float64 `json:"hi"`
	Why   string  `json:"why,omitempty"`
}

// Forbidden is the mean intensity of reflections that symmetry forbids, over
// the local mean of the allowed ones, for one symmetry element, or for all that screw
// axes and glide planes forbid ("all"). What a centring forbids has no lattice point that
// scattering could fill: it stands apart, marked by Centring, as a null for background and
// overlap. N is 0 and Why says so when the list has none.
type Forbidden struct {
	Crystal  string  `json:"crystal"`
	Position string  `json:"position"`
	Element  string  `json:"element"`
	Centring bool    `json:"by_centring,omitempty"`
	N        int     `json:"n"`
	Ratio    float64 `json:"ratio"`
	SU       float64 `json:"su"`
	Z        float64 `json:"z"`
	MeanIS   float64 `json:"mean_i_over_sigma"`
	Why      string  `json:"why,omitempty"`
}

// CrystalsResult joins the primary contrasts of all crystals.
type CrystalsResult struct {
	N         int      `json:"n"`
	InThese   Interval `json:"in_these_crystals"`
	LikeThese Interval `json:"in_crystals_like_these"`
	SharedSE  float64  `json:"shared_se"` // of what the errors of all crystals have in common
	Q         float64  `json:"q"`
	QP        float64  `json:"q_p"`
	Tau2      float64  `json:"tau2"`
	I2        float64  `json:"i2"`
	SameSign  int      `json:"same_sign"`
	SignP     float64  `json:"sign_p"`
	SmallestP float64  `json:"smallest_sign_p"`
	LeaveOut  []Left   `json:"leave_one_out"`
	Why       string   `json:"why,omitempty"`
	PageL     float64  `json:"page_l"`
	PageP     float64  `json:"page_p"`
	PageBest  float64  `json:"smallest_page_p"`
	MeanAgree float64  `json:"correlation_between_crystals"`
}

// Left is the pooled estimate without one crystal.
type Left struct {
	Without string   `json:"without"`
	M       Interval `json:"m"`
}

// ThicknessResult is the growth of mu = -ln(1-m) with thickness.
type ThicknessResult struct {
	Lines []ThicknessLine `json:"lines"`
	Slope Interval        `json:"slope_per_100nm"`
	// Across is the line through separate crystals.
	Across *AcrossLine `json:"across_crystals,omitempty"`
	// Tilt is the growth within one position of each crystal.
	Tilt []TiltSlope `json:"within_a_position,omitempty"`
	Why  string      `json:"why,omitempty"`
}

// ThicknessLine is one crystal's line through its positions. Rising is the non-decreasing
// sequence nearest to Mu.
type ThicknessLine struct {
	Crystal string    `json:"crystal"`
	T       []float64 `json:"thickness_nm"`
	Mu      []float64 `json:"mu"`
	MuSE    []float64 `json:"mu_se"`
	Rising  []float64 `json:"rising,omitempty"`
	Slope   Interval  `json:"slope_per_100nm"`
	Chi2    float64   `json:"chi2"`
	DF      int       `json:"df"`
	Why     string    `json:"why,omitempty"`
}

// ControlResult is one control with what it can and cannot see.
type ControlResult struct {
	Control  string   `json:"control"`
	Crystal  string   `json:"crystal"`
	M        Interval `json:"m"`
	Expected float64  `json:"expected"`
	P        float64  `json:"p"`
	Passed   bool     `json:"passed"`
	Can      string   `json:"can_see"`
	Cannot   string   `json:"cannot_see"`
	Why      string   `json:"why,omitempty"`
	// Q is the curb beside M, ExpectedQ what it should be.
	Q         Interval `json:"q"`
	ExpectedQ float64  `json:"expected_q"`
	// Draws counts the data sets behind the row. Through says which part of the
	// pipeline they went through. Rejections is the share of them in which the test of
	// the curve rejects (of the detection limit: in which m is seen), Misses that in
	// which the interval of m misses Expected.
	Draws      int     `json:"draws"`
	Through    string  `json:"through,omitempty"`
	Rejections float64 `json:"rejections"`
	Misses     float64 `json:"misses"`
	// Verdict is fine, fails or not known (then Passed is false too).
	Verdict string `json:"verdict"`
}

// LedgerEntry is one confounder with a figure and a verdict: fine, caution,
// fails, or not known.
type LedgerEntry struct {
	Check   string  `json:"check"`
	Where   string  `json:"where,omitempty"`
	Value   float64 `json:"value"`
	Unit    string  `json:"unit,omitempty"`
	Verdict string  `json:"verdict"`
	Why     string  `json:"why"`
}

// Specification is m under one set of choices.
type Specification struct {
	Crystal string   `json:"crystal"`
	Choice  string   `json:"choice"`
	Level   string   `json:"level"`
	M       Interval `json:"m"`
	Q       Interval `json:"q"`
	Leading bool     `json:"leading"`
}

// Expectation is what scattering physics leads one to expect; an aid to
// interpretation, never a prediction of m.
type Expectation struct {
	EnergyKeV      float64 `json:"energy_kev"`
	WavelengthA    float64 `json:"wavelength_a"`
	InteractionVnm float64 `json:"interaction_rad_per_v_nm"`
	ElasticMFPNM   float64 `json:"elastic_mean_free_path_nm"`
	InelasticMFPNM float64 `json:"inelastic_mean_free_path_nm"`
	Uncertainty    float64 `json:"relative_uncertainty"`
	// Source says where the paths come from, in words.
	Source string `json:"mean_free_paths_from,omitempty"`
	// Budget is at the thicknesses of the series, thin to thick, each once; BudgetGrid
	// from 0 to a quarter beyond the thickest, for a figure.
	Budget     []Budget     `json:"budget"`
	BudgetGrid []Budget     `json:"budget_grid,omitempty"`
	TwoBeam    TwoBeamCurve `json:"two_beam"`
	Why        string       `json:"why,omitempty"`
}

// TwoBeamCurve is the integrated intensity of the two-beam case over its
// kinematic limit (Blackman 1939) against strength, at the thinnest and the
// thickest position. Strength 1 has the extinction distance ExtinctionNM, that of
// the root mean square amplitude at spacing DA of a crystal of random light atoms.
type TwoBeamCurve struct {
	ExtinctionNM float64    `json:"extinction_distance_nm"`
	DA           float64    `json:"d_a"`
	ThicknessNM  [2]float64 `json:"thickness_nm"`
	Strength     []float64  `json:"strength"`
	Thin         []float64  `json:"thin"`
	Thick        []float64  `json:"thick"`
	Why          string     `json:"why,omitempty"`
}

// Budget is the share of electrons of each fate at one thickness. The ranges, lowest
// and highest, are what the uncertainty of both mean free paths allows; nil when it is not
// known.
type Budget struct {
	ThicknessNM float64 `json:"thickness_nm"`
	Unscattered float64 `json:"unscattered"`
	Kinematic   float64 `json:"kinematic"`
	Multiple    float64 `json:"multiply_elastic"`
	Inelastic   float64 `json:"inelastic"`

	KinematicRange []float64 `json:"kinematic_range,omitempty"`
	MultipleRange  []float64 `json:"multiply_elastic_range,omitempty"`
	InelasticRange []float64 `json:"inelastic_range,omitempty"`
}

// Matters is what the fitted exchange would do to a refinement.
type Matters struct {
	Crystal        string  `json:"crystal"`
	M              float64 `json:"m"`
	AgreementShift float64 `json:"agreement_factor_shift"`
	WeakShift      float64 `json:"weak_amplitude_shift"`
}

// Answer is one card of the report's first section: a sentence, and what stands
// behind it crystal by crystal.
type Answer struct {
	Question string   `json:"question"`
	Text     string   `json:"text"`
	Detail   []string `json:"detail"`
	Verdict  string   `json:"verdict"`
	Section  string   `json:"section"`
}

// WarningResult is a warning as plain data.
type WarningResult struct {
	Code  string `json:"code"`
	Where string `json:"where,omitempty"`
	Text  string `json:"text"`
}

// Environment says what made the result.
type Environment struct {
	Go       string            `json:"go"`
	Thinward string            `json:"thinward"`
	Modules  map[string]string `json:"modules"`
}

// StepTime is how long a step took.
type StepTime struct {
	Step    string  `json:"step"`
	Seconds float64 `json:"seconds"`
}

// String says what the result is of; the numbers are in its fields.
func (r *Result) String() string {
	if r == nil {
		return "no result"
	}
	return fmt.Sprintf("%s: %d positions, %d contrasts, %d ledger entries", r.Series, len(r.Intake), len(r.Contrasts), len(r.Ledger))
}
