package analysis

import (
	"context"
	"math"
	"slices"

	"thinward/analysis/curve"
	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/parallel"
	"thinward/analysis/resample"
)

// confounders are the checks that need more than a look at numbers that are
// there.
type confounders struct {
	bleed, double, jitter     []placed // positions
	tilt, ice, common, tipped []placed // primary contrasts
	lying                     []placed // crystals that take strengths from others
	giants                    []placed // primary contrasts
	group                     evidence.Finding
}

// Ledger looks for confounders in the observations and returns all entries of the
// ledger that the steps so far allow.
func (s *Study) Ledger(ctx context.Context) ([]LedgerEntry, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.found != nil {
		return s.ledger(), nil
	}
	list, err := s.primariesStep(ctx)
	if err != nil {
		return nil, err
	}
	f := &confounders{}
	if err := s.lookAtFrames(ctx, f); err != nil {
		return nil, err
	}
	n := len(list)
	f.tilt, f.ice, f.common, f.tipped, f.giants = make([]placed, n), make([]placed, n), make([]placed, n), make([]placed, n), make([]placed, n)
	err = parallel.For(ctx, n, s.settings.Workers, func(ctx context.Context, i int) error {
		x := list[i]
		name := x.Result.Crystal
		f.ice[i] = placed{name, evidence.IceOf(s.rings(x))}
		f.common[i] = placed{name, evidence.Coverage(s.common(x))}
		tilt, err := s.tilt(ctx, x)
		if err != nil {
			return err
		}
		f.tilt[i] = placed{name, tilt}
		giants, err := s.giantsMove(ctx, x)
		if err != nil {
			return err
		}
		f.giants[i] = placed{name, giants}
		tipped, err := s.tipping(ctx, x)
		f.tipped[i] = placed{name, tipped}
		return err
	})
	if err != nil {
		return nil, err
	}
	f.lying, f.group = s.lying(list), s.symmetry()
	s.found = f
	s.progress("ledger", 1, 1)
	return s.ledger(), nil
}

func (s *Study) ledgerFound(b *ledgerBook) {
	f := s.found
	if f == nil {
		return
	}
	b.fold(checkGiants, "crystals", 0, f.giants)
	b.fold(checkBleed, "positions", 0, f.bleed)
	b.fold(checkDouble, "positions", 0, f.double)
	b.fold(checkFrames, "positions", 0, f.jitter)
	b.fold(checkTilt, "crystals", 0, f.tilt)
	b.fold(checkIce, "crystals", 0, f.ice)
	b.fold(checkCommon, "crystals", 1, f.common)
	b.fold(checkLying, "crystals", 90, f.lying)
	b.fold(checkTipping, "crystals", math.Inf(1), f.tipped)
	b.add(checkGroup, "", f.group)
}

// lookAtFrames asks what reflections on common frames do to each other.
func (s *Study) lookAtFrames(ctx context.Context, f *confounders) error {
	var places [][2]int
	for i := range s.Series.Crystals {
		for j := range s.Series.Crystals[i].Positions {
			places = append(places, [2]int{i, j})
		}
	}
	n := len(places)
	f.bleed, f.double, f.jitter = make([]placed, n), make([]placed, n), make([]placed, n)
	return parallel.For(ctx, n, s.settings.Workers, func(_ context.Context, k int) error {
		i, j := places[k][0], places[k][1]
		c, where := s.crossings(i, j), s.place(i, j)
		f.bleed[k] = placed{where, evidence.BleedOf(evidence.Bleed(c))}
		f.double[k] = placed{where, evidence.DoubleOf(evidence.DoubleScattering(c))}
		f.jitter[k] = placed{where, evidence.JitterOf(evidence.FrameJitter(c))}
		return nil
	})
}

func (s *Study) crossings(i, j int) *evidence.Crossings {
	sc, o := s.scaled[i], s.intake.Positions[i][j].Observations
	p := sc.slot[j]
	scaled := sc.Positions[j]
	c := &evidence.Crossings{H: o.H, K: o.K, L: o.L, Frame: o.Frame, Unique: scaled.Unique, I: scaled.I, Var: scaled.Var,
		Scale: sc.Fit.Scale[sc.first[p] : sc.first[p]+o.Len()], Signal: make([]float64, o.Len()), Own: make([]float64, o.Len())}
	merged := intensity.Merge(s.intake.Catalogue.Len(), scaled)
	for r, u := range scaled.Unique {
		c.Own[r] = merged.J[u]
		c.Signal[r] = c.Scale[r] * math.Max(sc.Fit.J[u], 0)
	}
	return c
}

func (s *Study) rings(x *Compared) []evidence.Ring {
	d := make([]float64, x.Pairs.Len())
	for i, s2 := range x.Pairs.S2 {
		d[i] = 1 / (2 * math.Sqrt(s2))
	}
	return evidence.Rings(d, x.Pairs.Eps(), x.Pairs.EpsVar(), iceRings)
}

// common compares the reflections of a contrast that are pairs with those that
// only one of its positions has.
func (s *Study) common(x *Compared) evidence.Common {
	cat := s.intake.Catalogue
	paired := make([]bool, cat.Len())
	var commonD, lostD []float64
	for i, u := range x.Pairs.Unique {
		paired[u] = true
		commonD = append(commonD, 1/(2*math.Sqrt(x.Pairs.S2[i])))
	}
	local := s.localMeans(x)
	var in, out []float64
	seen := make([]bool, cat.Len())
	for _, m := range []*intensity.Merged{intensity.Merge(cat.Len(), x.thin), intensity.Merge(cat.Len(), x.thick)} {
		for u, n := range m.N {
			if n == 0 || cat.Absent[u] || !(local[u] > 0) {
				continue
			}
			if paired[u] {
				in = append(in, m.J[u]/local[u])
				continue
			}
			out = append(out, m.J[u]/local[u])
			if !seen[u] {
				seen[u] = true
				lostD = append(lostD, 1/(2*math.Sqrt(cat.S2[u])))
			}
		}
	}
	c := evidence.Common{Lost: len(lostD), Share: float64(len(commonD)) / float64(len(commonD)+len(lostD)), CommD: middleOf(commonD), LostD: middleOf(lostD)}
	c.Strength = mean(out) - mean(in)
	c.StrengthSE = math.Sqrt(squareOfMean(out) + squareOfMean(in))
	return c
}

// squareOfMean is the squared standard error of a mean.
func squareOfMean(v []float64) float64 {
	if len(v) < 2 {
		return math.Inf(1)
	}
	m, sum := mean(v), 0.0
	for _, x := range v {
		sum += (x - m) * (x - m)
	}
	n := float64(len(v))
	return sum / (n * (n - 1))
}

func middleOf(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	sorted := slices.Clone(v)
	slices.Sort(sorted)
	return sorted[len(sorted)/2]
}

// tipping asks by how much the ratio of sigmas must be wrong for the curve on the
// inverse-variance axis to go away.
func (s *Study) tipping(ctx context.Context, x *Compared) (evidence.Finding, error) {
	eps, w := x.Pairs.Eps(), weights(x.Pairs)
	seed := s.seed(x.Result.Crystal, "tipping")
	t, err := x.Pairs.Tipping(ctx, func(ctx context.Context, z []float64) (float64, error) {
		b, err := curve.ByStrength(ctx, z, eps, w, &curve.Settings{Resample: resample.Settings{Replicates: 200, Workers: 1, Seed: seed}})
		if err != nil {
			return 0, err
		}
		return b.P, nil
	}, nil)
	if err != nil {
		if ctx.Err() != nil {
			return evidence.Finding{}, ctx.Err()
		}
		return evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown, Why: err.Error()}, nil
	}
	lo, hi := s.sigmaRange(x.Contrast)
	for k := range x.Result.Axes {
		if x.Result.Axes[k].Axis == difference.AxisInverseVariance.String() {
			x.Result.Axes[k].P, x.Result.Axes[k].Tip = t.P, t.Nearest
		}
	}
	return evidence.TippingOf(t.P, t.Up, t.Down, lo, hi), nil
}

// sigmaRange is the range of factors on sigma_thin/sigma_thick that the intervals
// of the noise model leave open; all factors without one.
func (s *Study) sigmaRange(c Contrast) (lo, hi float64) {
	if c.Across() {
		return 0, math.Inf(1)
	}
	sc := s.scaled[c.Crystal]
	a, b := sc.Noise.Position[sc.slot[c.Thin]], sc.Noise.Position[sc.slot[c.Thick]]
	if !a.Estimable || !b.Estimable {
		return 0, math.Inf(1)
	}
	ratio := a.A / b.A
	return a.ALo / b.AHi / ratio, a.AHi / b.ALo / ratio
}
