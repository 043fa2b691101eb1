package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/size"
)

// tiltShare is the share of the observations of a position that count as of low, and
// as of high, tilt.
const tiltShare = 0.4

// TiltSlope is growth with thickness seen within one position: a slab that is tilted
// by an angle is 1/cos of it as thick along the beam, so that equivalents at high and
// at low tilt are a contrast of their own, which shares neither specimen place nor dose with
// the one between positions. ExtraNM is how much longer the way is on the mean at high
// tilt, M the exchange from low to high tilt by one number, the model (m), SE its error, and Slope
// mu = -ln(1-M) per 100 nm of way; on invented slabs it comes out 5 to 10 % low. Between is
// the slope of the primary contrast by its leading model, per 100 nm by which the mean way
// through the thick position is longer than that through the thin.
type TiltSlope struct {
	Crystal  string   `json:"crystal"`
	Position string   `json:"position"`
	Pairs    int      `json:"pairs"`
	ExtraNM  float64  `json:"extra_nm"`
	M        Interval `json:"m"`
	SE       float64  `json:"se"`
	Slope    Interval `json:"slope_per_100nm"`
	Between  Interval `json:"slope_between_positions"`
	Why      string   `json:"why,omitempty"`
}

// tiltOf is the angle in degrees, 0 to 90, between the beam and the normal of a slab that
// faces the beam at zero: seen from behind a slab is as thick as from before.
func tiltOf(phi, zero float64) float64 {
	d := math.Mod(math.Abs(phi-zero), 180)
	return math.Min(d, 180-d)
}

// tilt compares equivalents at low and at high tilt within the thick position.
func (s *Study) tilt(ctx context.Context, x *Compared) (evidence.Finding, error) {
	t, err := s.tiltSlope(ctx, x)
	if err != nil {
		return evidence.Finding{}, err
	}
	if t.Why != "" {
		return evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown, Why: t.Why}, nil
	}
	return evidence.TiltOf(t.M.Value, t.SE, t.Pairs), nil
}

// tiltSlope reads the growth within the thick position of a contrast. What the data do not
// allow stands in Why; an error is that of a cancelled context.
func (s *Study) tiltSlope(ctx context.Context, x *Compared) (*TiltSlope, error) {
	p := &s.Series.Crystals[x.Contrast.ThickCrystal].Positions[x.Contrast.Thick]
	t := &TiltSlope{Crystal: s.Series.Crystals[x.Contrast.ThickCrystal].Name, Position: p.Name, ExtraNM: math.NaN(), M: none(), Slope: none(), Between: none(), SE: math.NaN()}
	switch {
	case !p.HasTiltZero:
		t.Why = "tilt_zero_deg, the angle at which the slab faces the beam, is not given"
		return t, nil
	case x.thick.Phi == nil:
		t.Why = "no rotation angles"
		return t, nil
	}
	zero := s.intake.Positions[x.Contrast.ThickCrystal][x.Contrast.Thick].Turn.Of(p.TiltZeroDeg)
	a, b := tiltParts(x.thick.Phi, zero)
	r := s.newReading(x)
	if r.others == nil {
		r.third = intensity.Merge(r.cat.Len(), x.thin)
	}
	r.model = size.M
	pairs, err := r.pair(ctx, scaledRows(x.thick, a), scaledRows(x.thick, b), difference.MatchNever)
	if err != nil {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		t.Why = "too few reflections have equivalents at low and at high tilt"
		return t, nil
	}
	v, err := r.ofPairs(ctx, pairs)
	if err != nil {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		t.Why = err.Error()
		return t, nil
	}
	t.Pairs, t.M, t.SE = pairs.Len(), intervalOf(v.M), v.M.SE
	t.ExtraNM = p.ThicknessNM * extraWay(x.thick, pairs, a, b, zero)
	t.Slope = s.perWay(v.M.Value, v.M.SE, t.ExtraNM)
	thin := &s.Series.Crystals[x.Contrast.Crystal].Positions[x.Contrast.Thin]
	if e := x.Result.Exchange; x.Contrast.Crystal == x.Contrast.ThickCrystal && thin.HasTiltZero && x.thin.Phi != nil {
		before := s.intake.Positions[x.Contrast.Crystal][x.Contrast.Thin].Turn.Of(thin.TiltZeroDeg)
		step := p.ThicknessNM*meanWay(x.thick, zero) - thin.ThicknessNM*meanWay(x.thin, before)
		t.Between = s.perWay(e.M, e.SE, step)
	}
	return t, nil
}

// perWay is mu = -ln(1-m) over a way in nm, per 100 nm, with the interval of m alone.
func (s *Study) perWay(m, se, nm float64) Interval {
	if !(m < 1) || !(se > 0) || !(nm > 0) {
		return none()
	}
	per := 100 / nm
	mu, half := -math.Log(1-m)*per, zOf(s.settings.Level)*se/(1-m)*per
	return interval(mu, mu-half, mu+half, "")
}

// meanWay is the mean of 1/cos of the tilt, with the weights of the observations.
func meanWay(p *intensity.Scaled, zero float64) float64 {
	sum, weight := 0.0, 0.0
	for o, v := range p.Var {
		sum += wayOf(p.Phi[o], zero) / v
		weight += 1 / v
	}
	return sum / weight
}

// wayOf is 1/cos of the tilt; edge-on, where that has no end, 85 degrees stand for what
// lies beyond.
func wayOf(phi, zero float64) float64 {
	return 1 / math.Cos(math.Min(tiltOf(phi, zero), 85)*math.Pi/180)
}

// tiltParts gives the rows at low and at high tilt.
func tiltParts(phi []float64, zero float64) (low, high []int) {
	tilt := make([]float64, len(phi))
	for o, v := range phi {
		tilt[o] = tiltOf(v, zero)
	}
	sorted := slices.Clone(tilt)
	slices.Sort(sorted)
	n := float64(len(sorted))
	most, least := sorted[int(tiltShare*n)], sorted[int((1-tiltShare)*n)]
	for o, v := range tilt {
		switch {
		case v <= most:
			low = append(low, o)
		case v >= least:
			high = append(high, o)
		}
	}
	return low, high
}

// extraWay is the mean over the pairs of 1/cos of the tilt behind their thick side, the rows
// high, less that behind their thin side, with the weights of their observations.
func extraWay(p *intensity.Scaled, pairs *difference.Pairs, low, high []int, zero float64) float64 {
	way := func(rows []int) map[int32]float64 {
		sum, weight := map[int32]float64{}, map[int32]float64{}
		for _, o := range rows {
			w := 1 / p.Var[o]
			sum[p.Unique[o]] += w * wayOf(p.Phi[o], zero)
			weight[p.Unique[o]] += w
		}
		for u, w := range weight {
			sum[u] /= w
		}
		return sum
	}
	a, b, extra := way(low), way(high), 0.0
	for _, u := range pairs.Unique {
		extra += (b[u] - a[u]) / float64(pairs.Len())
	}
	return extra
}

// withinPositions reads the growth within the thick position of every primary contrast.
func (s *Study) withinPositions(ctx context.Context) ([]TiltSlope, error) {
	var out []TiltSlope
	for _, x := range s.primaries() {
		t, err := s.tiltSlope(ctx, x)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", s.Name(x.Contrast), err)
		}
		out = append(out, *t)
	}
	return out, nil
}
