package analysis

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
	"thinward/analysis/pool"
)

// PlanSettings steer Plan. nil and zero fields mean the defaults.
type PlanSettings struct {
	M     float64 // the exchange to be seen; 0 = 0.03
	Power float64 // 0 = 0.8
	// Spread is the standard deviation of m between crystals that is taken to hold; 0 = what
	// the crystals give, from five on, and below that none and the most that they allow, side
	// by side. A negative one is an error.
	Spread float64
}

// Planning says what it would take to see an exchange, judged by the noise of
// this series. Typical is a crystal like the mean of those measured. An infinite
// number stands for what cannot be reached in this way. Needs, Table, Curve and Seen
// hold for a spread Tau of m between crystals. Where that is neither given nor estimable
// it is 0, and Wide says the same for the most that the crystals allow, or for a spread as
// large as the error of one crystal where they allow none, or any.
type Planning struct {
	M        float64       `json:"m"`
	Level    float64       `json:"level"`
	Power    float64       `json:"power"`
	Measured []PlanCrystal `json:"measured"`
	Typical  PlanCrystal   `json:"typical"`
	Tau      float64       `json:"spread_between_crystals"`
	TauWhy   string        `json:"spread_why,omitempty"`
	// TauLo and TauHi are the interval of the spread by the Q-profile, 0 to +Inf of one
	// crystal.
	TauLo    float64     `json:"spread_lo"`
	TauHi    float64     `json:"spread_hi"`
	Seen     float64     `json:"seen_with_these_crystals"`
	Needs    []PlanNeed  `json:"crystals_needed"`
	Table    []PlanCell  `json:"table"`
	Curve    []PlanPoint `json:"curve"`
	Wide     *PlanWide   `json:"with_more_spread,omitempty"`
	Cautions []string    `json:"cautions"`
}

// PlanWide is the plan for another spread between crystals.
type PlanWide struct {
	Tau   float64     `json:"spread_between_crystals"`
	Seen  float64     `json:"seen_with_these_crystals"`
	Needs []PlanNeed  `json:"crystals_needed"`
	Table []PlanCell  `json:"table"`
	Curve []PlanPoint `json:"curve"`
}

// PlanCrystal is what one crystal can say of m in its primary contrast: the
// standard error, the pairs behind it and how many the resolution allows at all,
// the mean number of observations a reflection and position, the share of SE^2
// that counting noise makes, and the smallest m that it sees alone.
type PlanCrystal struct {
	Crystal      string  `json:"crystal"`
	SE           float64 `json:"se"`
	Pairs        float64 `json:"pairs"`
	Possible     int     `json:"possible_pairs"`
	Multiplicity float64 `json:"multiplicity"`
	NoiseShare   float64 `json:"noise_share"`
	Seen         float64 `json:"seen"`
	Why          string  `json:"why,omitempty"`
	// Assumed says that SE is that of the fit to half of the thin position: without another
	// crystal m is known as a bracket only, and that further crystals give strengths with
	// which it is known as well as that is an assumption.
	Assumed bool `json:"assumed,omitempty"`
}

// PlanNeed is the number of crystals like the typical one that see M; 0 with a
// Why when no number does.
type PlanNeed struct {
	M        float64 `json:"m"`
	Crystals int     `json:"crystals"`
	Why      string  `json:"why,omitempty"`
}

// PlanCell is what each of so many crystals must bring to see M: pairs at the
// multiplicity of today, or multiplicity (at least 1) at the pairs of today.
type PlanCell struct {
	M            float64 `json:"m"`
	Crystals     int     `json:"crystals"`
	Pairs        float64 `json:"pairs"`
	Multiplicity float64 `json:"multiplicity"`
}

// PlanPoint is the smallest m seen with so many crystals: as measured, with twice
// the multiplicity, and with twice the pairs.
type PlanPoint struct {
	Crystals          int     `json:"crystals"`
	Seen              float64 `json:"seen"`
	TwiceMultiplicity float64 `json:"seen_at_twice_the_multiplicity"`
	TwicePairs        float64 `json:"seen_at_twice_the_pairs"`
}

var (
	plannedM        = []float64{0.01, 0.02, 0.03, 0.05, 0.10}
	plannedCrystals = []int{1, 2, 3, 5, 8, 12}
)

// Plan works out what it would take to see an exchange. SE^2 of one crystal has
// a part of counting noise, which falls with pairs and multiplicity, and a part
// of deviations, which falls with pairs alone; the spread between crystals falls
// with their number only (pool.Design). The share of noise is
//
//	sum f^2 (v1 + v2) / sum f^2 v_D, at most 1,  f = (min(z, 6) - mean) / <J>shell
//
// over the pairs, with v1 and v2 the variances of both positions and v_D that of
// their difference, refitted from the differences. It is an error when m can be
// estimated in no crystal.
func (s *Study) Plan(ctx context.Context, set *PlanSettings) (*Planning, error) {
	var o PlanSettings
	if set != nil {
		o = *set
	}
	if o.M == 0 {
		o.M = 0.03
	}
	if o.Power == 0 {
		o.Power = 0.8
	}
	if !(o.M > 0 && o.M < 1) {
		return nil, fmt.Errorf("plan: m is %g: it must lie between 0 and 1", o.M)
	}
	if !(o.Power > 0.5 && o.Power < 1) {
		return nil, fmt.Errorf("plan: the power is %g: it must lie between 0.5 and 1", o.Power)
	}
	if !(o.Spread >= 0 && o.Spread < 1) {
		return nil, fmt.Errorf("plan: the spread between crystals is %g: it must lie between 0 and 1", o.Spread)
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	p := &Planning{M: o.M, Level: s.settings.Level, Power: o.Power}
	var m, se []float64
	for _, c := range s.list {
		if !c.Primary || c.Across() {
			continue
		}
		x, err := s.compareStep(ctx, c)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", s.Name(c), err)
		}
		k, err := s.planCrystal(x, p)
		if err != nil {
			return nil, err
		}
		p.Measured = append(p.Measured, k)
		if e := &x.Result.Exchange; e.SE > 0 && !math.IsNaN(e.M) {
			m, se = append(m, e.M), append(se, e.SE)
		}
	}
	p.TauHi = math.Inf(1)
	if len(m) > 0 {
		var err error
		if p.TauLo, p.TauHi, err = pool.TauInterval(m, se, p.Level); err != nil {
			return nil, fmt.Errorf("plan: %w", err)
		}
	}
	joined := s.poolCrystals()
	p.Tau, p.TauWhy = math.Sqrt(joined.Tau2), joined.Why
	switch {
	case o.Spread > 0:
		p.Tau, p.TauWhy = o.Spread, ""
	case math.IsNaN(p.Tau):
		p.Tau = 0
		if len(m) == 0 && p.assumed() > 0 {
			p.TauWhy = "brackets tell no spread between crystals"
		}
	}
	if err := p.fill(o.Spread > 0); err != nil {
		return nil, err
	}
	return p, nil
}

func (s *Study) planCrystal(x *Compared, p *Planning) (PlanCrystal, error) {
	k := PlanCrystal{Crystal: x.Result.Crystal, SE: x.Result.Exchange.SE, Pairs: float64(x.Pairs.Len()), NoiseShare: noiseShare(x), Why: x.Result.Exchange.Why}
	s2max := 0.0
	for i, v := range x.Pairs.S2 {
		s2max = max(s2max, v)
		k.Multiplicity += float64(x.Pairs.NThin[i]+x.Pairs.NThick[i]) / 2
	}
	k.Multiplicity /= k.Pairs
	if half := &x.Result.Bracket.Thin; x.Leading == leadBracket && !(k.SE > 0) {
		if se := (half.Hi - half.Lo) / 2 / zOf(p.Level); se > 0 && !math.IsInf(se, 1) && !math.IsNaN(half.Value) {
			k.SE, k.Assumed = se, true
		}
	}
	switch k.Seen = math.NaN(); {
	case k.Assumed:
		k.Seen = math.Inf(1)
	case k.SE > 0:
		k.Seen = pool.Visible(k.SE, 1-p.Level, p.Power)
	}
	possible, _, err := intensity.Possible(s.Series.Cell, s.Series.Group, s2max, s.Series.FriedelApart)
	k.Possible = len(possible)
	return k, err
}

// noiseShare is the share of the variance of m that the variances of the two
// positions make, NaN without pairs that have a strength.
func noiseShare(x *Compared) float64 {
	p, z := x.Pairs, x.Strengths.Z
	mean, n := 0.0, 0.0
	for _, v := range z {
		if !math.IsNaN(v) {
			mean += math.Min(v, 6)
			n++
		}
	}
	mean /= n
	noise, all := 0.0, 0.0
	for i, v := range z {
		if math.IsNaN(v) {
			continue
		}
		f := (math.Min(v, 6) - mean) / p.MeanPooled[i]
		noise += f * f * (p.VarThin[i] + p.VarThick[i])
		all += f * f * p.VarD[i]
	}
	return math.Min(1, noise/all)
}

// fill works out all that follows from what the crystals can say.
func (p *Planning) fill(given bool) error {
	d, err := p.typical()
	if err != nil {
		return err
	}
	at := p.spread(d)
	p.Seen, p.Needs, p.Table, p.Curve = at.Seen, at.Needs, at.Table, at.Curve
	if p.TauWhy != "" {
		if d.Tau = p.TauHi; d.Tau == 0 || math.IsInf(d.Tau, 1) {
			d.Tau = d.SE
		}
		p.Wide = p.spread(d)
	}
	p.caution(given)
	return nil
}

// spread is the plan for crystals like d.
func (p *Planning) spread(d pool.Design) *PlanWide {
	out := &PlanWide{Tau: d.Tau}
	alone := p.assumed() > 0 && p.assumed() == len(p.Measured) // a bracket is all that one gives
	seen := func(k, pairs, mult float64) float64 {
		if k == 1 && alone {
			return math.Inf(1)
		}
		return pool.Visible(d.SEFor(k, pairs*d.Pairs, mult*d.Multiplicity), 1-p.Level, p.Power)
	}
	list := append([]float64(nil), plannedM...)
	if !slices.Contains(list, p.M) {
		list = append(list, p.M)
		slices.Sort(list)
	}
	for _, m := range list {
		need := PlanNeed{M: m}
		var err error
		if need.Crystals, err = d.Crystals(m, 1-p.Level, p.Power); err != nil {
			need.Why = err.Error()
		} else if alone {
			need.Crystals = max(2, need.Crystals)
		}
		out.Needs = append(out.Needs, need)
		for _, k := range plannedCrystals {
			c := PlanCell{M: m, Crystals: k}
			c.Pairs, c.Multiplicity = needed(d, m, float64(k), 1-p.Level, p.Power)
			c.Multiplicity = math.Max(1, c.Multiplicity)
			if k == 1 && alone {
				c.Pairs, c.Multiplicity = math.Inf(1), math.Inf(1)
			}
			out.Table = append(out.Table, c)
		}
	}
	for k := 1; k <= 20; k++ {
		out.Curve = append(out.Curve, PlanPoint{Crystals: k, Seen: seen(float64(k), 1, 1), TwiceMultiplicity: seen(float64(k), 1, 2), TwicePairs: seen(float64(k), 2, 1)})
	}
	out.Seen = seen(float64(len(p.Measured)), 1, 1)
	return out
}

// typical is the crystal in the mean: SE by its square, the share of noise
// weighted with it.
func (p *Planning) typical() (pool.Design, error) {
	d := pool.Design{Tau: p.Tau}
	n, possible, weight := 0.0, 0.0, 0.0
	for _, k := range p.Measured {
		if !(k.SE > 0) || math.IsNaN(k.NoiseShare) {
			continue
		}
		n++
		d.SE += k.SE * k.SE
		d.Pairs += k.Pairs
		d.Multiplicity += k.Multiplicity
		d.NoiseShare += k.SE * k.SE * k.NoiseShare
		weight += k.SE * k.SE
		possible += float64(k.Possible)
	}
	if n == 0 {
		why := ""
		for _, k := range p.Measured {
			if k.Why != "" {
				why = ": " + k.Crystal + ": " + k.Why
				break
			}
		}
		return d, errors.New("plan: m is estimable in no crystal of this series, so its noise says nothing" + why)
	}
	d.SE, d.Pairs, d.Multiplicity, d.NoiseShare = math.Sqrt(d.SE/n), d.Pairs/n, d.Multiplicity/n, d.NoiseShare/weight
	p.Typical = PlanCrystal{
		Crystal: "typical", SE: d.SE, Pairs: d.Pairs, Possible: int(possible / n), Multiplicity: d.Multiplicity, NoiseShare: d.NoiseShare,
		Seen: pool.Visible(d.SE, 1-p.Level, p.Power),
	}
	if p.assumed() == len(p.Measured) {
		p.Typical.Assumed, p.Typical.Seen = true, math.Inf(1)
	}
	return d, nil
}

// needed solves SEFor(k, pairs, multiplicity) = m/(z + z) for pairs at the
// multiplicity of d, and for multiplicity at its pairs; +Inf where no number
// does, since spread or deviations alone are too large.
func needed(d pool.Design, m, k, level, power float64) (pairs, multiplicity float64) {
	target := m / pool.Visible(1, level, power)
	free := target*target*k - d.Tau*d.Tau
	if free <= 0 {
		return math.Inf(1), math.Inf(1)
	}
	pairs = d.Pairs * d.SE * d.SE / free
	left := free/(d.SE*d.SE) - (1 - d.NoiseShare)
	switch {
	case left <= 0:
		multiplicity = math.Inf(1)
	default:
		multiplicity = d.Multiplicity * d.NoiseShare / left
	}
	return pairs, multiplicity
}

// assumed counts the crystals whose error is that of half of the thin position.
func (p *Planning) assumed() int {
	n := 0
	for i := range p.Measured {
		if p.Measured[i].Assumed {
			n++
		}
	}
	return n
}

func (p *Planning) caution(given bool) {
	k, level := len(p.Measured), 100*p.Level
	if n := p.assumed(); n > 0 {
		p.Cautions = append(p.Cautions, fmt.Sprintf("An assumption: in %d of %s m is known as a bracket only, which one crystal never leaves. Its error here is that of half of the thin position, taken to hold for further crystals once each has strengths from the others: plan for two at least.", n, plural(k, "crystal")))
	}
	switch {
	case given && p.TauHi < p.Tau:
		p.Cautions = append(p.Cautions, fmt.Sprintf("The spread between crystals is taken as %.3f, as given; these crystals allow no more than %.3f (Q-profile, %.0f %%).", p.Tau, p.TauHi, level))
	case given && p.TauLo > p.Tau:
		p.Cautions = append(p.Cautions, fmt.Sprintf("The spread between crystals is taken as %.3f, as given; these crystals ask for at least %.3f (Q-profile, %.0f %%), so that the true need is larger.", p.Tau, p.TauLo, level))
	case given:
		p.Cautions = append(p.Cautions, fmt.Sprintf("The spread between crystals is taken as %.3f, as given.", p.Tau))
	case p.Wide == nil:
	case p.TauHi == 0:
		p.Cautions = append(p.Cautions, fmt.Sprintf("%s: the first table takes none, the second one as large as the error of one crystal, %.3f. These %d crystals agree better than their errors lead one to expect, so that they set no limit.", p.TauWhy, p.Wide.Tau, k))
	case math.IsInf(p.TauHi, 1) && p.assumed() > 0:
		p.Cautions = append(p.Cautions, fmt.Sprintf("%s: the first table takes none, the second one as large as the error of one crystal, %.3f. Give one to plan with.", p.TauWhy, p.Wide.Tau))
	case math.IsInf(p.TauHi, 1):
		p.Cautions = append(p.Cautions, fmt.Sprintf("%s: the first table takes none, the second one as large as the error of one crystal, %.3f. One crystal allows any spread; give one to plan with.", p.TauWhy, p.Wide.Tau))
	default:
		p.Cautions = append(p.Cautions, fmt.Sprintf("%s: the first table takes none, the second the most that these %d crystals allow, %.3f (Q-profile, %.0f %%). The need lies between the two; so few crystals leave it wide open.", p.TauWhy, k, p.TauHi, level))
	}
	if p.Typical.NoiseShare < 0.5 {
		p.Cautions = append(p.Cautions, fmt.Sprintf("Counting noise makes %.0f %% of the uncertainty; the rest is deviations of single reflections, which more counting does not remove. More reflections or more crystals do.", 100*p.Typical.NoiseShare))
	}
	if p.Typical.Possible > 0 {
		p.Cautions = append(p.Cautions, fmt.Sprintf("A crystal has at most %d unique reflections to this resolution: more pairs than that need a higher resolution, where signal is weaker than assumed here.", p.Typical.Possible))
	}
	p.Cautions = append(p.Cautions, "An exchange is seen when a two-sided test finds it with the power given; the need grows where the offset or the curb must be larger than in this series.")
}
