package analysis

import (
	"context"
	"fmt"
	"sync"

	"thinward/analysis/curve"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/resample"
	"thinward/analysis/scaling"
)

// Settings steer a Study. nil and zero fields mean the defaults named here.
type Settings struct {
	Scaling scaling.Settings      // of the fit of each crystal
	Noise   scaling.NoiseSettings // of its noise model
	Curve   curve.Settings        // of all curves; Resample within it is overwritten by what stands below
	// Replicates is the number of bootstrap draws; 0 = 2000. Flips is the number of
	// random sign flips of the curve's test; 0 = 2000.
	Replicates, Flips int
	// Level is that of all intervals; 0 = 0.95.
	Level float64
	// ShellPairs is the number of pairs a resolution shell holds at least; 0 = 100.
	// MaxShells bounds the number of shells; 0 = 20.
	ShellPairs, MaxShells int
	// Axis names the leading strength axis: "crystals", "bracket", "third",
	// "inverse-variance", "thin", "thick", "mean" or "" for the default of the series.
	Axis string
	// Long makes the controls take more draws.
	Long bool
	// Workers is the number of goroutines; 0 = all processors. It never changes a
	// result.
	Workers int
	// Progress, when not nil, is told the step and how far it is. Calls do not
	// overlap.
	Progress func(step string, done, total int)
}

func (s *Settings) filled() Settings {
	var o Settings
	if s != nil {
		o = *s
	}
	for _, f := range []struct {
		v   *int
		def int
	}{{&o.Replicates, 2000}, {&o.Flips, 2000}, {&o.ShellPairs, 100}, {&o.MaxShells, 20}} {
		if *f.v == 0 {
			*f.v = f.def
		}
	}
	if o.Level == 0 {
		o.Level = 0.95
	}
	return o
}

// Study is the analysis of one series. Its methods run the steps they need
// first, once, and keep what came out; they may be called from several
// goroutines, one at a time does the work. A step that failed or was cancelled is
// tried again by the next call.
type Study struct {
	Series   Series
	settings Settings

	mu            sync.Mutex
	list          []Contrast
	intake        *Intake
	table         []IntakeResult
	sharing       []CommonResult
	remarks       []IntakeRemark
	centring      []CentringResult
	laueClass     *LaueResult
	laueFinding   evidence.Finding
	turns         []TurnResult
	indexing      []IndexingResult
	scaled        []*ScaledCrystal
	compared      map[Contrast]*Compared
	forbidden     []Forbidden
	quality       []Quality
	distributions []Distribution
	mates         []FriedelMates
	pooled        *joined
	controls      []ControlResult
	spec          []Specification
	found         *confounders
	expected      *Expectation
	warnings      []intensity.Warning
}

// New checks a series and makes a Study of it; set may be nil. The columns of
// the series are not changed.
func New(series Series, set *Settings) (*Study, error) {
	if err := series.checkAxis(set); err != nil {
		return nil, err
	}
	if err := series.check(); err != nil {
		return nil, err
	}
	list, err := series.contrasts()
	if err != nil {
		return nil, err
	}
	s := &Study{Series: series, settings: set.filled(), list: list, compared: map[Contrast]*Compared{}}
	s.warnings = append(s.warnings, series.Warnings...)
	return s, nil
}

// Contrasts lists what is compared: for each crystal the primary contrast
// first, then every other pair of positions, and last the contrasts between
// crystals that were asked for.
func (s *Study) Contrasts() []Contrast { return append([]Contrast(nil), s.list...) }

// Name gives a contrast as "L1: thin - thick".
func (s *Study) Name(c Contrast) string {
	thin, thick := s.Series.Crystals[c.Crystal], s.Series.Crystals[c.ThickCrystal]
	if c.Across() {
		return fmt.Sprintf("%s/%s - %s/%s", thin.Name, thin.Positions[c.Thin].Name, thick.Name, thick.Positions[c.Thick].Name)
	}
	return fmt.Sprintf("%s: %s - %s", thin.Name, thin.Positions[c.Thin].Name, thick.Positions[c.Thick].Name)
}

// Find returns the contrast of a crystal by the names of its positions; empty
// names mean the primary one, an empty crystal the first.
func (s *Study) Find(crystalName, thin, thick string) (Contrast, error) {
	for _, c := range s.list {
		a, b := &s.Series.Crystals[c.Crystal], &s.Series.Crystals[c.ThickCrystal]
		if crystalName != "" && a.Name != crystalName {
			continue
		}
		if thin == "" && thick == "" && c.Primary || a.Positions[c.Thin].Name == thin && b.Positions[c.Thick].Name == thick {
			return c, nil
		}
	}
	return Contrast{}, fmt.Errorf("no contrast %s: %s - %s in this series", crystalName, thin, thick)
}

func (s *Study) seed(names ...string) resample.Seed {
	return resample.NewSeed(s.Series.Seed).At(names...)
}

func (s *Study) progress(step string, done, total int) {
	if s.settings.Progress != nil {
		s.settings.Progress(step, done, total)
	}
}

func (s *Study) warn(code, where, format string, args ...any) {
	s.warnings = append(s.warnings, intensity.Warning{Code: code, Where: where, Text: fmt.Sprintf(format, args...)})
}

func (s *Study) place(i, j int) string {
	return s.Series.Crystals[i].Name + "/" + s.Series.Crystals[i].Positions[j].Name
}

// Run does every step in order and returns the numbers. after, when not nil, is
// called after each step with its name and all numbers so far; an error from it
// stops the run.
func (s *Study) Run(ctx context.Context, after func(step string, sofar *Result) error) (*Result, error) {
	for _, step := range s.steps() {
		if err := step.do(ctx); err != nil {
			return nil, &StepError{Step: step.name, Err: err}
		}
		if after != nil {
			s.mu.Lock()
			r := s.assemble()
			s.mu.Unlock()
			if err := after(step.name, r); err != nil {
				return nil, &StepError{Step: step.name, Err: err}
			}
		}
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.assemble(), nil
}

// StepNames lists the steps of Run in order.
func (s *Study) StepNames() []string {
	var names []string
	for _, step := range s.steps() {
		names = append(names, step.name)
	}
	return names
}

type step struct {
	name string
	do   func(context.Context) error
}

func (s *Study) steps() []step {
	return []step{
		{"intake", func(ctx context.Context) error { _, err := s.IntakeTable(ctx); return err }},
		{"scaling", func(ctx context.Context) error { _, err := s.Scale(ctx); return err }},
		{"differences", func(ctx context.Context) error {
			for _, c := range s.list {
				if _, err := s.Compare(ctx, c); err != nil {
					return fmt.Errorf("%s: %w", s.Name(c), err)
				}
			}
			return nil
		}},
		{"forbidden", func(ctx context.Context) error { _, err := s.Forbidden(ctx); return err }},
		{"quality", func(ctx context.Context) error { _, _, err := s.Quality(ctx); return err }},
		{"crystals", func(ctx context.Context) error { _, err := s.Join(ctx); return err }},
		{"controls", func(ctx context.Context) error { _, err := s.Controls(ctx); return err }},
		{"specification", func(ctx context.Context) error { _, err := s.Specification(ctx); return err }},
		{"ledger", func(ctx context.Context) error { _, err := s.Ledger(ctx); return err }},
		{"expectation", func(ctx context.Context) error { _, err := s.Expectation(ctx); return err }},
	}
}

// StepError is a step that failed.
type StepError struct {
	Step string
	Err  error
}

// Error gives step and cause.
func (e *StepError) Error() string { return e.Step + ": " + e.Err.Error() }

// Unwrap gives the cause.
func (e *StepError) Unwrap() error { return e.Err }
