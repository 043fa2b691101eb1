package session

import (
	"encoding/json"
	"fmt"
	"math"
	"sort"

	"thinward/analysis"
	"thinward/analysis/figure"
)

// brushable bounds the pairs of one figure that can be listed by drawing a frame
// around them; those that differ most are kept.
const brushable = 1500

// changed is the number of most changed reflections that stand under the figure.
const changed = 12

// Pairs shows every pair of the primary contrasts, dI against strength.
func (s *Session) Pairs() *View {
	r := s.upTo(stepDifferences)
	return pairsView(r, s.study.PairRows())
}

func pairsView(r *analysis.Result, rows []analysis.PairRow) *View {
	fv := &figureView{title: "Every pair", pick: "Crystal", empty: "No pair has a strength on the leading axis.",
		caption: "One point a pair of reflections (hexagons of counts when there are many), with the moving mean over them: the pattern is small beside the scatter of single reflections, so no single reflection proves or refutes it. Draw a frame on the plot to list the reflections under it."}
	g := newGrid("The most changed reflections, gains and losses; z is over noise and the deviations that pairs have anyway", "contrast", "h k l", "d (\u00c5)", "strength", "difference, local means", "over noise alone", "z").words(1)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary {
			continue
		}
		var list []*analysis.PairRow
		for k := range rows {
			p := &rows[k]
			if p.Crystal == c.Crystal && p.Thin == c.Thin && (p.Thick == c.Thick || c.ThickCrystal != "" && p.Thick == c.ThickCrystal+"/"+c.Thick) && !math.IsNaN(p.Strength) && !math.IsNaN(p.Eps) {
				list = append(list, p)
			}
		}
		if len(list) == 0 {
			continue
		}
		one := pairing{list: []*analysis.ContrastResult{c}}
		f := &figure.Cloud{Width: singleWide, Height: 1.1 * singleHigh, Title: "Every pair, difference against strength, " + contrastName(c), Desc: fmt.Sprintf("%d pairs with the moving mean of the difference.", len(list)),
			X: figure.Axis{Label: "strength (" + c.StrengthAxis + ")", Scale: figure.Root}, Y: figure.Axis{Label: one.difference() + ", in local means", Zero: true},
			Over: []figure.Curve{{Name: "moving mean", X: c.Strength.Grid, Y: c.Strength.Mean}}}
		for _, p := range list {
			f.PX, f.PY = append(f.PX, p.Strength), append(f.PY, p.Eps)
		}
		f.Y.Lo, f.Y.Hi = middle(f.PY)
		drawn, places, err := f.DrawPlaces()
		if err != nil {
			panic(&Error{Step: "figure", Err: err, Inside: true})
		}
		order := byChange(list)
		fv.put(contrastName(c), drawn, []*figure.Figure{drawn}, brushData(list, places, order)+changedTable(c, list, order).html())
		for _, k := range bothWays(list, order, 2) {
			p := list[k]
			g.add(contrastName(c), fmt.Sprint(p.HKL.H, " ", p.HKL.K, " ", p.HKL.L), number(p.D, 2), number(p.Strength, 2), number(p.Eps, 3), number(overNoise(p), 1), number(p.Z, 1))
		}
	}
	fv.summary = g
	return fv.view()
}

// middle is the range that holds all but the outermost half percent at each end,
// widened by half, so that a few wild pairs do not press the rest together.
func middle(v []float64) (lo, hi float64) {
	sorted := append([]float64(nil), v...)
	sort.Float64s(sorted)
	lo, hi = sorted[len(sorted)/200], sorted[len(sorted)-1-len(sorted)/200]
	half := 0.1 * (hi - lo)
	return lo - half, hi + half
}

func byChange(list []*analysis.PairRow) []int {
	order := make([]int, len(list))
	for i := range order {
		order[i] = i
	}
	size := func(i int) float64 {
		if z := math.Abs(list[i].Z); !math.IsNaN(z) {
			return z
		}
		return -1
	}
	sort.SliceStable(order, func(a, b int) bool { return size(order[a]) > size(order[b]) })
	return order
}

// bothWays are the first n of the order that gain with thickness, then the first n that
// lose: errors in proportion to the intensity leave a gain more room in z than a loss.
func bothWays(list []*analysis.PairRow, order []int, n int) []int {
	var gains, losses []int
	for _, k := range order {
		switch z := list[k].Z; {
		case z < 0 && len(gains) < n:
			gains = append(gains, k)
		case z > 0 && len(losses) < n:
			losses = append(losses, k)
		}
	}
	return append(gains, losses...)
}

// overNoise is the difference over the errors of the two intensities, without the
// deviations that z allows for.
func overNoise(p *analysis.PairRow) float64 { return p.DI / math.Hypot(p.SUThin, p.SUThick) }

func changedTable(c *analysis.ContrastResult, list []*analysis.PairRow, order []int) *grid {
	thin, thick := (&pairing{list: []*analysis.ContrastResult{c}}).sides()
	g := newGrid("The most changed reflections of "+contrastName(c)+", gains first; J is the mean intensity on the common scale of the crystal, z is over noise and the deviations that pairs have anyway", "h k l", "d (\u00c5)", "strength", "J "+thin, "J "+thick, thin+" \u2212 "+thick+", local means", "over noise alone", "z")
	for _, k := range bothWays(list, order, changed/2) {
		p := list[k]
		g.add(fmt.Sprint(p.HKL.H, " ", p.HKL.K, " ", p.HKL.L), number(p.D, 2), number(p.Strength, 2), auto(p.JThin)+" \u00b1 "+auto(p.SUThin), auto(p.JThick)+" \u00b1 "+auto(p.SUThick), number(p.Eps, 3), number(overNoise(p), 1), number(p.Z, 1))
	}
	return g
}

// brushData is a block of data for the page's script: place in the figure, hkl,
// d, strength, difference and z of each pair, the most changed first.
func brushData(list []*analysis.PairRow, places []figure.Place, order []int) string {
	var rows [][9]float64
	for _, k := range order {
		if math.IsNaN(places[k].X) || len(rows) == brushable {
			continue
		}
		p := list[k]
		rows = append(rows, [9]float64{places[k].X, places[k].Y, float64(p.HKL.H), float64(p.HKL.K), float64(p.HKL.L), round(p.D, 2), round(p.Strength, 3), round(p.Eps, 3), round(p.Z, 1)})
	}
	if len(rows) == 0 {
		return ""
	}
	// Finite numbers always encode: places, eps and strength were tested, z is not
	// a number only without a variance and is then written as 0 by round.
	text, err := json.Marshal(rows)
	if err != nil {
		panic(&Error{Step: "figure", Err: err, Inside: true})
	}
	return `<script type="application/json" class="brush-data">` + string(text) + `</script>`
}

func round(v float64, decimals int) float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return 0
	}
	f := math.Pow(10, float64(decimals))
	return math.Round(v*f) / f
}
