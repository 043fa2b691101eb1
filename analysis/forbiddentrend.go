package analysis

import "math"

// ForbiddenTrend is how the intensity of the reflections that one symmetry element forbids
// grows with thickness in one crystal: the slope of Forbidden.Ratio per 100 nm by least
// squares with weights 1/SU^2, which are larger than what counting leaves as reflections of
// one element differ (see intensity.Forbidden), and the same ones in each position. NaN from
// fewer than two positions of different thickness.
type ForbiddenTrend struct {
	Crystal, Element string
	Positions        int
	Slope, SU        float64
}

// ForbiddenTrends gives the trends of a list in the order of its crystals and elements;
// thickness is in nm by the name "crystal/position". Rows without a ratio, or whose
// thickness is not given, are left out.
func ForbiddenTrends(list []Forbidden, thickness map[string]float64) []ForbiddenTrend {
	type key struct{ crystal, element string }
	at := map[key]int{}
	var out []ForbiddenTrend
	var sums []trendSums
	for i := range list {
		f := &list[i]
		k := key{f.Crystal, f.Element}
		n, ok := at[k]
		if !ok {
			n = len(out)
			at[k] = n
			out = append(out, ForbiddenTrend{Crystal: f.Crystal, Element: f.Element})
			sums = append(sums, trendSums{})
		}
		t, known := thickness[f.Crystal+"/"+f.Position]
		if known && f.N > 0 && f.SU > 0 && !math.IsNaN(f.Ratio) && !math.IsInf(f.SU, 1) {
			sums[n].add(t/100, f.Ratio, 1/(f.SU*f.SU))
			out[n].Positions++
		}
	}
	for n := range out {
		out[n].Slope, out[n].SU = sums[n].slope()
	}
	return out
}

// trendSums are those of a weighted straight line.
type trendSums struct{ w, wx, wy, wxx, wxy float64 }

func (s *trendSums) add(x, y, w float64) {
	s.w += w
	s.wx += w * x
	s.wy += w * y
	s.wxx += w * x * x
	s.wxy += w * x * y
}

func (s *trendSums) slope() (slope, su float64) {
	spread := s.wxx - s.wx*s.wx/s.w
	if !(spread > 1e-9*s.wxx) {
		return math.NaN(), math.NaN()
	}
	return (s.wxy - s.wx*s.wy/s.w) / spread, 1 / math.Sqrt(spread)
}
