package analysis

import (
	"context"
	"math"

	"thinward/analysis/intensity"
)

// AngleInfluence is what one range of the rotation angle does to the agreement
// of equivalents in its position: R_meas with everything, and with the range
// left out. It is reported, and nothing is left out because of it.
type AngleInfluence struct {
	Crystal      string  `json:"crystal"`
	Position     string  `json:"position"`
	LoDeg        float64 `json:"lo_deg"`
	HiDeg        float64 `json:"hi_deg"`
	Observations int     `json:"observations"`
	RMeas        float64 `json:"r_meas"`
	RMeasWithout float64 `json:"r_meas_without"`
	CCHalf       float64 `json:"cc_half"`
	CCWithout    float64 `json:"cc_half_without"`
}

// influenceDeg is the width of a range in degrees.
const influenceDeg = 10

// AngleInfluences leaves out one range of 10 degrees of the rotation angle after
// the other, position by position, on the common scale. Positions without angles
// are left out.
func (s *Study) AngleInfluences(ctx context.Context) ([]AngleInfluence, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, err
	}
	var out []AngleInfluence
	for i, sc := range scaled {
		for j, p := range sc.Positions {
			if p.Phi == nil {
				continue
			}
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			rows := influences(p)
			for k := range rows {
				rows[k].Crystal, rows[k].Position = s.Series.Crystals[i].Name, s.Series.Crystals[i].Positions[j].Name
			}
			out = append(out, rows...)
		}
	}
	return out, nil
}

func influences(p *intensity.Scaled) []AngleInfluence {
	lo, hi, _ := coverage(p.Phi)
	all := intensity.MeasureR(p.Unique, p.I)
	cc, _ := intensity.SigmaTau(p.Unique, p.I)
	first := math.Floor(lo / influenceDeg)
	var out []AngleInfluence
	for b := first; b*influenceDeg <= hi; b++ {
		var unique []int32
		var values []float64
		for o, phi := range p.Phi {
			if math.Floor(phi/influenceDeg) != b {
				unique, values = append(unique, p.Unique[o]), append(values, p.I[o])
			}
		}
		n := len(p.Phi) - len(unique)
		if n == 0 {
			continue
		}
		without, _ := intensity.SigmaTau(unique, values)
		out = append(out, AngleInfluence{
			LoDeg: b * influenceDeg, HiDeg: (b + 1) * influenceDeg, Observations: n,
			RMeas: all.Meas, RMeasWithout: intensity.MeasureR(unique, values).Meas, CCHalf: cc, CCWithout: without,
		})
	}
	return out
}
