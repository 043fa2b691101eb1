package resample

import (
	"errors"
	"fmt"

	"thinward/analysis/intensity"
)

// Settings steer Bands, Scalars and FlipTest. nil and zero fields mean the
// documented defaults.
type Settings struct {
	// Replicates is the number of bootstrap draws or of random flips; 0 = 2000.
	Replicates int
	// Level is the confidence level in (0, 1); 0 = 0.95.
	Level float64
	// Seed names the random streams. Each function appends its own purpose
	// ("bands", "scalars", "flips"), so one seed may serve all three, and two
	// calls with one seed and as many units draw the same weights.
	Seed Seed
	// Workers is the number of goroutines; 0 = GOMAXPROCS. It never changes a bit
	// of the result.
	Workers int
	// Blocks gives the group each element belongs to, for drawing or flipping whole
	// groups (angle blocks, crystals); nil = every element is its own unit.
	Blocks []int32
	// ExactLimit: with fewer than 30 units all resamples are enumerated when there
	// are at most so many different ones; 0 = 100000 (ten units), negative = never.
	ExactLimit int
	// JackknifeGroups is the largest number of leave-out groups for the
	// acceleration of Scalars; 0 = 1000.
	JackknifeGroups int
	// NoBCa leaves out the jackknife and the BCa interval of Scalars.
	NoBCa bool
	// Accel gives the accelerations of Scalars when the caller knows them in closed
	// form (see Acceleration); nil = jackknife.
	Accel []float64
	// Sum makes FlipTest use |sum| instead of the self-normalised statistic.
	Sum bool
	// Progress is called now and then with the replicates done; nil = not called.
	// Calls do not overlap.
	Progress func(done, total int)
}

// Window is a half-open range [Lo, Hi) of ranks.
type Window struct{ Lo, Hi int }

// Len returns the number of ranks in the window.
func (w Window) Len() int { return w.Hi - w.Lo }

// Scheme says how resamples were made.
type Scheme int

// The schemes. Poisson weights serve 30 units or more; below that multinomial
// draws, or every resample with its probability when there are few enough.
const (
	SchemePoisson Scheme = iota
	SchemeMultinomial
	SchemeExact
)

// String returns a word for reports.
func (s Scheme) String() string {
	switch s {
	case SchemePoisson:
		return "poisson"
	case SchemeMultinomial:
		return "multinomial"
	case SchemeExact:
		return "exact"
	}
	return fmt.Sprintf("Scheme(%d)", int(s))
}

const (
	defaultReplicates = 2000
	defaultLevel      = 0.95
	defaultExact      = 100000
	defaultGroups     = 1000
	poissonUnits      = 30
)

// Codes of the warnings made here.
const (
	CodeFewUnits    = "few-units"
	CodeFailedDraws = "failed-draws"
	CodeFewDraws    = "few-draws"
)

var errReplicates = errors.New("resample: Replicates must be at least 2")

func (o *Settings) filled() (Settings, error) {
	var s Settings
	if o != nil {
		s = *o
	}
	if s.Replicates == 0 {
		s.Replicates = defaultReplicates
	}
	if s.Level == 0 {
		s.Level = defaultLevel
	}
	if s.ExactLimit == 0 {
		s.ExactLimit = defaultExact
	}
	if s.JackknifeGroups == 0 {
		s.JackknifeGroups = defaultGroups
	}
	if s.Replicates < 2 {
		return s, errReplicates
	}
	if !(s.Level > 0 && s.Level < 1) {
		return s, fmt.Errorf("resample: Level %g is not between 0 and 1", s.Level)
	}
	if s.JackknifeGroups < 2 {
		return s, fmt.Errorf("resample: JackknifeGroups %d is below 2", s.JackknifeGroups)
	}
	return s, nil
}

func warning(code, text, where string) intensity.Warning {
	return intensity.Warning{Code: code, Text: text, Where: where}
}
