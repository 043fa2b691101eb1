package simulate

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// lnRatio is ln of what each row holds over the law without deviations.
func lnRatio(s *Series, c, j int) (all []float64) {
	m := s.Specimens[c].Positions[j]
	for i, u := range m.Unique {
		all = append(all, math.Log(m.Expected[i]/(200*m.Law[u])))
	}
	return all
}

func deviant(share float64) *Plan {
	p := small()
	p.DMin = 1.1
	p.Common.GeometryShare = share
	p.Common.OmitForbidden = true
	positions := []Position{{Name: "thin", Deviation: 0.1}, {Name: "mid", Deviation: 0.2}, {Name: "thick", Deviation: 0.3}}
	p.Crystals = []Crystal{{Neighbours: 0.7, Positions: positions, Euler: []float64{10, 20, 30}}, {Neighbours: 0.7, Positions: positions, Euler: []float64{10, 20, 30}}}
	return p
}

func TestDeviationsHaveTheirSizeAndCorrelation(t *testing.T) {
	s := invent(t, deviant(0))
	n := float64(len(s.Truth.J))
	var x [2][3][]float64
	for c := range 2 {
		for j := range 3 {
			m := s.Specimens[c].Positions[j]
			a := 0.1 * float64(j+1)
			mean, sd := meanSD(m.LnDeviation)
			floatcmp.Check(t, "mean of ln", mean, -a*a/2, 4*a/math.Sqrt(n), 0)
			floatcmp.Check(t, "sd of ln", sd, a, 0, 4/math.Sqrt(2*n))
			x[c][j] = m.LnDeviation
			for i, u := range m.Unique {
				floatcmp.Check(t, "row", m.Expected[i], 200*m.Law[u]*math.Exp(m.LnDeviation[u]), 0, 1e-12)
			}
		}
	}
	tol := 4 / math.Sqrt(n)
	floatcmp.Check(t, "neighbours", correlation(x[0][0], x[0][1]), 0.7, tol, 0)
	floatcmp.Check(t, "neighbours", correlation(x[0][1], x[0][2]), 0.7, tol, 0)
	floatcmp.Check(t, "ends", correlation(x[0][0], x[0][2]), 0.49, tol, 0)
	floatcmp.Check(t, "crystals", correlation(x[0][1], x[1][1]), 0, tol, 0)
}

func TestGeometryShareSplitsTheVariance(t *testing.T) {
	s := invent(t, deviant(0.4))
	m := s.Specimens[0].Positions[2]
	var common, own []float64
	thin, thick := lnRatio(s, 0, 1), lnRatio(s, 0, 2)
	for i, u := range m.Unique {
		common = append(common, m.LnDeviation[u])
		own = append(own, thick[i]-m.LnDeviation[u])
	}
	_, sdCommon := meanSD(m.LnDeviation)
	_, sdOwn := meanSD(own)
	n := float64(len(m.LnDeviation))
	floatcmp.Check(t, "common part", sdCommon, 0.3*math.Sqrt(0.6), 0, 4/math.Sqrt(2*n))
	floatcmp.Check(t, "own part", sdOwn, 0.3*math.Sqrt(0.4), 0, 4/math.Sqrt(2*float64(len(own))))
	floatcmp.Check(t, "parts unrelated", correlation(common, own), 0, 4/math.Sqrt(n), 0)
	// Without misorientation the rows of both positions are the same indices.
	floatcmp.Check(t, "neighbours", correlation(thin, thick), 0.7, 4/math.Sqrt(n), 0)
	_, sd := meanSD(thick)
	floatcmp.Check(t, "both", sd, 0.3, 0, 4/math.Sqrt(2*n))
}
