package analysis

import (
	"context"
	"fmt"

	"thinward/analysis/intensity"
)

// Quality is the precision of one position on the common scale within one
// resolution shell; Shell is 0 for all of them together, else counts from low
// resolution.
type Quality struct {
	Crystal      string  `json:"crystal"`
	Position     string  `json:"position"`
	Shell        int     `json:"shell"`
	DLong        float64 `json:"d_long_a"`
	DShort       float64 `json:"d_short_a"`
	Observations int     `json:"observations"`
	Unique       int     `json:"unique"`
	Possible     int     `json:"possible"`
	Completeness float64 `json:"completeness"`
	Multiplicity float64 `json:"multiplicity"`
	IOverSigma   float64 `json:"i_over_sigma"`
	RMerge       float64 `json:"r_merge"`
	RMeas        float64 `json:"r_meas"`
	RPim         float64 `json:"r_pim"`
	CCHalf       float64 `json:"cc_half"`
	CCHalfTau    float64 `json:"cc_half_sigma_tau"`
	CCStar       float64 `json:"cc_star"`
}

// Distribution compares the strengths of one position with Wilson's laws:
// second and third moments from products of halves, which need no sigma, and
// the share of reflections below each strength Z.
type Distribution struct {
	Crystal      string    `json:"crystal"`
	Position     string    `json:"position"`
	Kind         string    `json:"kind"` // acentric or centric
	N            int       `json:"n"`
	Second       float64   `json:"second_moment"`
	SecondSE     float64   `json:"second_moment_se"`
	SecondTheory float64   `json:"second_moment_theory"`
	Third        float64   `json:"third_moment"`
	ThirdSE      float64   `json:"third_moment_se"`
	ThirdTheory  float64   `json:"third_moment_theory"`
	Z            []float64 `json:"z"`
	Below        []float64 `json:"below"`
	BelowTheory  []float64 `json:"below_theory"`
	Why          string    `json:"why,omitempty"`
}

// qualityShells is the number of resolution shells of the table.
const qualityShells = 8

// Quality measures the precision of every position on the common scale, how its strengths
// are distributed and how unequal its Friedel mates are (see FriedelMates).
func (s *Study) Quality(ctx context.Context) ([]Quality, []Distribution, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.quality != nil {
		return s.quality, s.distributions, nil
	}
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, nil, err
	}
	var rows []Quality
	var laws []Distribution
	var mates []FriedelMates
	for i, sc := range scaled {
		c := s.Series.Crystals[i].Name
		for j, p := range sc.Positions {
			own, err := s.precision(ctx, p, c, s.Series.Crystals[i].Positions[j].Name)
			if err != nil {
				return nil, nil, fmt.Errorf("%s: %w", s.place(i, j), err)
			}
			rows = append(rows, own...)
			laws = append(laws, s.distributionsOf(p, c, s.Series.Crystals[i].Positions[j].Name)...)
			mates = append(mates, s.friedelOf(p, c, s.Series.Crystals[i].Positions[j].Name)...)
		}
		if len(sc.Positions) > 1 {
			across, err := s.precision(ctx, together(sc.Positions), c, AllPositions)
			if err != nil {
				return nil, nil, fmt.Errorf("crystal %s, all positions: %w", c, err)
			}
			rows = append(rows, across...)
		}
	}
	s.quality, s.distributions, s.mates = rows, laws, mates
	return rows, laws, nil
}

// AllPositions stands in place of a position for the agreement across all
// positions of a crystal: what thickness does lowers it.
const AllPositions = "all positions"

// together joins scaled positions into one; angles are kept when all have them.
func together(list []*intensity.Scaled) *intensity.Scaled {
	out := &intensity.Scaled{}
	angles := true
	for _, p := range list {
		out.Unique, out.Raw = append(out.Unique, p.Unique...), append(out.Raw, p.Raw...)
		out.I, out.Var = append(out.I, p.I...), append(out.Var, p.Var...)
		out.Phi = append(out.Phi, p.Phi...)
		angles = angles && p.Phi != nil
	}
	if !angles {
		out.Phi = nil
	}
	return out
}

// precision gives the row of all shells and one a shell.
func (s *Study) precision(ctx context.Context, p *intensity.Scaled, crystal, position string) ([]Quality, error) {
	shells, all, err := intensity.Precise(ctx, p, s.intake.Catalogue, &intensity.PrecisionSettings{Shells: qualityShells, Key: s.seed(crystal, "halves").Stream(0).Uint64()})
	if err != nil {
		return nil, err
	}
	var rows []Quality
	for k, x := range append([]intensity.Precision{*all}, shells...) {
		rows = append(rows, Quality{
			Crystal: crystal, Position: position, Shell: k, DLong: x.DLong, DShort: x.DShort, Observations: x.Observations, Unique: x.Unique, Possible: x.Possible,
			Completeness: x.Completeness, Multiplicity: x.Multiplicity, IOverSigma: x.IOverSigma, RMerge: x.R.Merge, RMeas: x.R.Meas, RPim: x.R.Pim,
			CCHalf: x.CCHalf, CCHalfTau: x.CCHalfTau, CCStar: x.CCStar,
		})
	}
	return rows, nil
}

func (s *Study) distributionsOf(p *intensity.Scaled, crystal, position string) []Distribution {
	cat := s.intake.Catalogue
	merged := intensity.Merge(cat.Len(), p)
	sh := cat.Shells(s.shellCount([]*intensity.Merged{merged}), merged)
	a, b := intensity.MergeHalves(cat.Len(), p, s.seed(crystal, "halves").Stream(0).Uint64())
	acentric, centric := intensity.HalfMoments(a, b, cat, sh)
	cumulative := intensity.Distribution(merged, cat, sh, nil)
	row := func(kind string, m *intensity.Moments, n int, below, theory []float64) Distribution {
		d := Distribution{
			Crystal: crystal, Position: position, Kind: kind, N: n, Second: m.Second, SecondSE: m.SecondSE, SecondTheory: m.TheorySecond,
			Third: m.Third, ThirdSE: m.ThirdSE, ThirdTheory: m.TheoryThird, Z: cumulative.Z, Below: below, BelowTheory: theory,
		}
		if m.N < 2 {
			d.Why = "no reflection of this kind was measured at two equivalent indices"
		}
		return d
	}
	return []Distribution{
		row("acentric", acentric, cumulative.AcentricN, cumulative.Acentric, cumulative.AcentricExpected),
		row("centric", centric, cumulative.CentricN, cumulative.Centric, cumulative.CentricExpected),
	}
}
