package scaling

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

func where(p int) string { return fmt.Sprintf("position %d", p) }

// planCurves decides which positions carry a scale curve, before the data are
// looked at: all with real angles share one axis, so that curves are comparable.
func planCurves(in *Input, set *Settings) ([]curveAxis, []intensity.Warning) {
	var warn []intensity.Warning
	curve := make([]curveAxis, in.Positions)
	for p := range curve {
		curve[p].flat = true
	}
	if set.Model == BOnly || set.Model == Constant {
		return curve, nil
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	own := make([][2]float64, in.Positions)
	for p := range own {
		own[p] = [2]float64{math.Inf(1), math.Inf(-1)}
	}
	for i, p := range in.Position {
		if in.Phi == nil {
			break
		}
		x := in.Phi[i]
		own[p][0], own[p][1] = math.Min(own[p][0], x), math.Max(own[p][1], x)
		if in.angled(int(p)) {
			lo, hi = math.Min(lo, x), math.Max(hi, x)
		}
	}
	for p := range curve {
		r := own[p]
		switch {
		case in.angled(p) && hi-lo >= set.KnotDeg && r[1] >= r[0]:
			curve[p] = curveAxis{splineAxis: newSplineAxis(lo, hi, set.KnotDeg)}
			if r[1]-r[0] < set.KnotDeg {
				curve[p] = curveAxis{flat: true}
				warn = append(warn, narrow(p, r[1]-r[0], set.KnotDeg))
			}
		case in.angled(p) && r[1] >= r[0]:
			warn = append(warn, narrow(p, r[1]-r[0], set.KnotDeg))
		case in.angled(p):
		case set.FrameAsAngle && in.Phi != nil && r[1]-r[0] >= set.KnotFrames:
			curve[p] = curveAxis{splineAxis: newSplineAxis(r[0], r[1], set.KnotFrames), frames: true}
		default:
			warn = append(warn, intensity.Warning{Code: "no-angles", Where: where(p),
				Text: "no rotation angles: the scale of this position is one constant"})
		}
	}
	return curve, warn
}

func narrow(p int, span, knot float64) intensity.Warning {
	return intensity.Warning{Code: "angle-range", Where: where(p),
		Text: fmt.Sprintf("the angles span %.3g degrees, less than one knot spacing (%.3g): the scale of this position is one constant", span, knot)}
}

// usage counts where the observations of each position lie on its axis.
type usage struct {
	n    int
	mean []float64 // mean of each function: the row that gives mean ln K
	gram []float64 // mean of products, width by width
	cell []int     // observations in each interval
}

func (t *table) usage() []usage {
	out := make([]usage, len(t.curve))
	for p, c := range t.curve {
		k := c.width()
		out[p] = usage{mean: make([]float64, k), gram: make([]float64, k*k), cell: make([]int, max(1, c.cells))}
	}
	for i, p := range t.pos {
		o := &out[p]
		k := len(o.mean)
		b0, b1, b2, b3 := t.curve[p].basis(t.u[i])
		b := [4]float64{b0, b1, b2, b3}
		at := int(t.cell[i])
		o.n++
		o.cell[at]++
		for x := range 4 {
			o.mean[at+x] += b[x]
			for y := range 4 {
				o.gram[(at+x)*k+at+y] += b[x] * b[y]
			}
		}
	}
	for p := range out {
		if n := float64(out[p].n); n > 0 {
			for i := range out[p].mean {
				out[p].mean[i] /= n
			}
			for i := range out[p].gram {
				out[p].gram[i] /= n
			}
		}
	}
	return out
}

// gaps names stretches of the axis without observations.
func gaps(t *table, use []usage) []intensity.Warning {
	var warn []intensity.Warning
	for p, c := range t.curve {
		if c.flat {
			continue
		}
		for from := 0; from < c.cells; from++ {
			to := from
			for to < c.cells && use[p].cell[to] == 0 {
				to++
			}
			if to > from {
				warn = append(warn, intensity.Warning{Code: "angle-gap", Where: where(p),
					Text: fmt.Sprintf("no observations between %.4g and %.4g: the scale curve there is a guess",
						c.lo+float64(from)*c.step, c.lo+float64(to)*c.step)})
				from = to
			}
		}
	}
	return warn
}
