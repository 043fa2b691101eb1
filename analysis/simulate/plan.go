package simulate

import (
	"thinward/analysis/crystal"
)

// Plan describes a series to invent. Every zero field means the default its
// comment names; a Plan is never changed by Invent. The tags are the keys of a
// plan file (TOML).
type Plan struct {
	Title      string  `toml:"title,omitempty"`
	EnergyKeV  float64 `toml:"energy_keV,omitempty"`  // 300
	SpaceGroup string  `toml:"space_group,omitempty"` // "P 21 21 21"
	// Declared is the space group that the series is said to have, which the cell must fit;
	// SpaceGroup when empty. Its Laue class may be another one: unique reflections of the
	// series are then not those of the truth.
	Declared string  `toml:"declared,omitempty"`
	Seed     uint64  `toml:"seed,omitempty"`  // any number, 0 included
	DMin     float64 `toml:"d_min,omitempty"` // resolution limit in angstrom, 1.0
	// ThicknessScaleSU is the common relative uncertainty of all thicknesses; it
	// is only handed on.
	ThicknessScaleSU float64   `toml:"thickness_scale_su,omitempty"`
	Cell             Cell      `toml:"cell,omitempty"`
	Structure        Structure `toml:"structure,omitempty"`
	// Shells is the number of equal-count shells over which the local mean of
	// the exchange is taken; 0 is one shell for every 50 allowed unique
	// reflections, at least 1 and at most 40.
	Shells int `toml:"shells,omitempty"`
	// Population makes that local mean the one which Wilson's law expects of the
	// shell in place of that of just these reflections, so that a shell mean is one of a
	// sample; it needs Structure.Wilson.
	Population bool `toml:"population,omitempty"`
	// Common holds what all positions share: wherever a position's own field is
	// zero, the value here is taken, and where both are zero the default.
	Common   Position  `toml:"common,omitempty"`
	Crystals []Crystal `toml:"crystal,omitempty"`
	// Law, when not nil, gives the noise-free intensity of raw index h in one
	// position in place of curb, exchange and deviations; ok false means not
	// excited. It is called from several goroutines at once. Crystal and
	// position count from 0.
	Law func(crystal, position int, h crystal.HKL) (j float64, ok bool) `toml:"-" json:"-"`
}

// Cell holds the unit cell: angstrom and degrees; an angle of 0 is 90.
type Cell struct {
	A     float64 `toml:"a,omitempty"`
	B     float64 `toml:"b,omitempty"`
	C     float64 `toml:"c,omitempty"`
	Alpha float64 `toml:"alpha,omitempty"`
	Beta  float64 `toml:"beta,omitempty"`
	Gamma float64 `toml:"gamma,omitempty"`
}

// Structure says where the kinematic intensities come from.
type Structure struct {
	// Wilson draws the intensities from Wilson's distributions (centric and
	// acentric apart, epsilon included) instead of placing atoms.
	Wilson bool `toml:"wilson,omitempty"`
	// Atoms are the kinds of atom in one asymmetric unit. Empty means carbon,
	// nitrogen and oxygen as 4:1:1, one atom for every 18 cubic angstrom.
	Atoms []AtomKind `toml:"atom,omitempty"`
	// MinDistance is the smallest distance in angstrom between any two atoms,
	// symmetry copies included, 1.2.
	MinDistance float64 `toml:"min_distance,omitempty"`
	// B is the overall B factor in square angstrom, 0 by default.
	B float64 `toml:"b,omitempty"`
	// Given, when not empty, are the atoms to use instead of random ones.
	Given []Atom `toml:"site,omitempty"`
}

// AtomKind is a number of atoms of one element, hydrogen to argon, with a B
// factor of their own in square angstrom.
type AtomKind struct {
	Element string  `toml:"element,omitempty"`
	Number  int     `toml:"number,omitempty"`
	B       float64 `toml:"b,omitempty"`
}

// Atom is one atom of the asymmetric unit in fractional coordinates.
type Atom struct {
	Element string  `toml:"element,omitempty"`
	X       float64 `toml:"x,omitempty"`
	Y       float64 `toml:"y,omitempty"`
	Z       float64 `toml:"z,omitempty"`
	B       float64 `toml:"b,omitempty"`
}

// Crystal is one specimen of the plan.
type Crystal struct {
	Name string `toml:"name,omitempty"` // "L1", "L2", ... by order
	// Euler are three angles in degrees about z, x, z; empty is a random
	// orientation from the seed and the crystal's number.
	Euler []float64 `toml:"euler_deg,omitempty"`
	// Neighbours is the correlation between the deviations of neighbouring
	// positions (first-order autoregressive in the order listed), -1 to 1.
	Neighbours float64 `toml:"neighbour_correlation,omitempty"`
	// Wedge makes the positions when none are listed.
	Wedge     *Wedge     `toml:"wedge,omitempty"`
	Positions []Position `toml:"position,omitempty"`
}

// Wedge is a crystal that thickens evenly: Steps positions from ThinNM to
// ThickNM, named after their thickness rank. With ExchangeNM > 0 the exchange of
// a position of thickness t is 1 - exp(-t/ExchangeNM).
type Wedge struct {
	ThinNM     float64 `toml:"thin_nm,omitempty"`  // 140
	ThickNM    float64 `toml:"thick_nm,omitempty"` // 310
	Steps      int     `toml:"steps,omitempty"`    // 3
	ExchangeNM float64 `toml:"exchange_nm,omitempty"`
}

// Position is one measured place. Rates are per observation unless said.
type Position struct {
	Name        string  `toml:"name,omitempty"` // "p1", "p2", ... by order
	ThicknessNM float64 `toml:"thickness_nm,omitempty"`
	// ThicknessSUNM, Order, Dose, TiltZeroDeg and ReplicateOf are handed on to
	// the manifest; Dose and TiltZeroDeg also act, below.
	ThicknessSUNM float64 `toml:"thickness_su_nm,omitempty"`
	Order         int     `toml:"order,omitempty"`
	Dose          float64 `toml:"dose_e_per_A2,omitempty"` // accumulated at mid-measurement
	TiltZeroDeg   float64 `toml:"tilt_zero_deg,omitempty"`
	ReplicateOf   string  `toml:"replicate_of,omitempty"`

	TiltDeg        []float64 `toml:"tilt_deg,omitempty"`        // lowest and highest angle, [-60, 60]
	GapDeg         []float64 `toml:"gap_deg,omitempty"`         // an unmeasured span within, none
	FrameDeg       float64   `toml:"frame_deg,omitempty"`       // rotation of one frame, 0.5
	MisorientedDeg float64   `toml:"misoriented_deg,omitempty"` // sd of a random rotation about each axis against the crystal
	Lorentz        bool      `toml:"lorentz,omitempty"`         // see Geometry.Lorentz; off by default

	Counts float64 `toml:"counts,omitempty"` // electrons at unit intensity and unit scale, 200
	Gain   float64 `toml:"gain,omitempty"`   // reported units per electron, 1
	// LnScale is the mean ln K of the position; Cos and Sin are the terms
	// k = 1, 2, ... of sum Cos_k cos(k pi x) + Sin_k sin(k pi x) in ln K, with x
	// from 0 to 1 over the tilt range.
	LnScale float64   `toml:"ln_scale,omitempty"`
	Cos     []float64 `toml:"ln_scale_cos,omitempty"`
	Sin     []float64 `toml:"ln_scale_sin,omitempty"`
	B       float64   `toml:"b,omitempty"`          // against the others, square angstrom
	DoseB   float64   `toml:"b_per_dose,omitempty"` // further B for each unit of Dose

	Background     float64 `toml:"background,omitempty"`      // mean electrons under a reflection
	BackgroundArea float64 `toml:"background_area,omitempty"` // area that estimates it over the area of the reflection, 4
	Readout        float64 `toml:"readout,omitempty"`         // sd of readout noise, electrons
	SigmaFactor    float64 `toml:"sigma_factor,omitempty"`    // reported over honest sigma, 1
	Noiseless      bool    `toml:"noiseless,omitempty"`       // no counting, background or readout noise is drawn

	Scatter       float64 `toml:"scatter,omitempty"`        // b: relative sd of a fresh error of each observation
	FrameJitter   float64 `toml:"frame_jitter,omitempty"`   // relative sd of a factor common to one frame
	OutlierShare  float64 `toml:"outlier_share,omitempty"`  // share of observations multiplied by OutlierFactor
	OutlierFactor float64 `toml:"outlier_factor,omitempty"` // 3

	Deviation float64 `toml:"deviation,omitempty"` // a: sd of ln of the reproducible deviation
	// Polarity is the inequality of Friedel mates, as an amplitude that interferes makes it
	// where there is no centre: an acentric J becomes J + Polarity sqrt(J <J>shell) on one side and
	// less by as much on the other, not below 0; which is which is the same in all crystals.
	Polarity float64 `toml:"polarity,omitempty"`
	// GeometryShare is the share of the deviation's variance that each raw index
	// has of its own; the rest is common to all equivalents. 0 to 1.
	GeometryShare float64 `toml:"geometry_share,omitempty"`

	Exchange float64 `toml:"exchange,omitempty"` // m, 0 to 1, against the kinematic intensities
	// TiltThickens lets the thickness grow as 1/cos(phi - TiltZeroDeg):
	// m(phi) = 1 - (1-m)^(1/cos).
	TiltThickens bool     `toml:"tilt_thickens,omitempty"`
	Curb         float64  `toml:"curb,omitempty"`        // q
	CurbForm     CurbForm `toml:"curb_form,omitempty"`   // "intensity", "strength" or "rate"
	DeadCounts   float64  `toml:"dead_counts,omitempty"` // count n is recorded as n/(1 + n DeadCounts)
	Offset       float64  `toml:"offset,omitempty"`      // o: constant, in units of Counts
	Ice          float64  `toml:"ice,omitempty"`         // peak of broad rings left in the intensities, in units of Counts
	Bleed        float64  `toml:"bleed,omitempty"`       // share of the signal of lattice neighbours on the same frame

	OmitForbidden bool   `toml:"omit_forbidden,omitempty"` // screw-axis and glide absences are not recorded
	WithCentring  bool   `toml:"with_centring,omitempty"`  // centring absences are recorded too, with no signal of their own
	Once          bool   `toml:"once,omitempty"`           // only the first observation of each unique reflection is recorded
	Reindex       string `toml:"reindex,omitempty"`        // written indices as "k,h,-l" of the true ones
	Copies        int    `toml:"copies,omitempty"`         // rows of each observation, on consecutive frames, 1
	// CutBelow removes observations under CutBelow times their sigma; nil
	// removes none.
	CutBelow *float64 `toml:"cut_below_sigma,omitempty"`
}
