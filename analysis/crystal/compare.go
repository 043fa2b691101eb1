package crystal

import (
	"fmt"
	"math"
	"strings"
)

// CellDifference is how far two cells are apart.
type CellDifference struct {
	Length     float64 // largest relative difference of a length, |a1 - a2| / mean
	LengthName string  // which: "a", "b" or "c"
	Angle      float64 // largest difference of an angle in degrees
	AngleName  string  // "alpha", "beta" or "gamma"
}

// CompareCells returns the largest relative difference of a length and the
// largest difference of an angle, taken edge by edge as the cells are written;
// cells written in different settings are not brought together. A NaN in either
// cell makes the difference NaN.
func CompareCells(p, q Cell) CellDifference {
	d := CellDifference{LengthName: "a", AngleName: "alpha"}
	lengths := [3][2]float64{{p.A, q.A}, {p.B, q.B}, {p.C, q.C}}
	angles := [3][2]float64{{p.Alpha, q.Alpha}, {p.Beta, q.Beta}, {p.Gamma, q.Gamma}}
	for i := range 3 {
		x := 2 * math.Abs(lengths[i][0]-lengths[i][1]) / (lengths[i][0] + lengths[i][1])
		if x > d.Length || math.IsNaN(x) {
			d.Length, d.LengthName = x, "abc"[i:i+1]
		}
		y := math.Abs(angles[i][0] - angles[i][1])
		if y > d.Angle || math.IsNaN(y) {
			d.Angle, d.AngleName = y, [3]string{"alpha", "beta", "gamma"}[i]
		}
	}
	return d
}

// FitsCell reports with an error when the rotations of the group do not leave the
// cell as it is, to within a relative difference of lengths and a difference of
// angles in degrees: when a P 4 comes with a and b that differ, or hexagonal
// axes with a rhombohedral cell.
func (g *Group) FitsCell(c Cell, length, angleDeg float64) error {
	if err := c.Check(); err != nil {
		return err
	}
	for _, o := range g.coset {
		m := widen(o.R)
		turned := cellOfMetric(congruent(c.Metric(), m))
		d := CompareCells(c, turned)
		if d.Length <= length && d.Angle <= angleDeg {
			continue
		}
		hint := ""
		if g.setting.Choice == "H" && math.Abs(c.A-c.C) <= length*c.A && math.Abs(c.Alpha-c.Gamma) <= angleDeg {
			hint = "; the cell looks like rhombohedral axes, choice :R"
		}
		if g.setting.Choice == "R" && math.Abs(c.Gamma-120) <= angleDeg {
			hint = "; the cell looks like hexagonal axes, choice :H"
		}
		return fmt.Errorf("cell %s does not fit %s%s: the rotation of %s makes it %s (%s differs by %.2f %%, %s by %.2f degrees)%s",
			c, g, g.wants(c, length, angleDeg), o, turned, d.LengthName, 100*d.Length, d.AngleName, d.Angle, hint)
	}
	return nil
}

// wants names what the rotations of the group ask of the cell and is not so, like
// ", which asks for a = b and beta = 90"; empty where it is no such equality.
func (g *Group) wants(c Cell, length, angleDeg float64) string {
	fit := cellOfMetric(g.meanMetric(c))
	asks, want := [3]float64{fit.Alpha, fit.Beta, fit.Gamma}, []string{}
	same := func(x, y float64) bool { return math.Abs(x-y) < 1e-6*x }
	axes, has := [3]float64{fit.A, fit.B, fit.C}, [3]float64{c.A, c.B, c.C}
	for i := range 3 {
		j := (i + 1) % 3
		if same(axes[i], axes[j]) && math.Abs(has[i]-has[j]) > length*(has[i]+has[j])/2 {
			want = append(want, fmt.Sprintf("%c = %c", "abc"[min(i, j)], "abc"[max(i, j)]))
		}
	}
	names, angles := [3]string{"alpha", "beta", "gamma"}, [3]float64{c.Alpha, c.Beta, c.Gamma}
	for i := range 3 {
		j := (i + 1) % 3
		switch fixed := math.Round(asks[i]); {
		case same(asks[i], fixed) && (fixed == 90 || fixed == 120):
			if 2*math.Abs(angles[i]-fixed) > angleDeg {
				want = append(want, fmt.Sprintf("%s = %.0f", names[i], fixed))
			}
		case same(asks[i], asks[j]) && math.Abs(angles[i]-angles[j]) > angleDeg:
			want = append(want, names[min(i, j)]+" = "+names[max(i, j)])
		}
	}
	if len(want) == 0 {
		return ""
	}
	return ", which asks for " + strings.Join(want, " and ")
}

// meanMetric is the metric of the cell averaged over the rotations of the group.
func (g *Group) meanMetric(c Cell) [3][3]float64 {
	var mean [3][3]float64
	metric := c.Metric()
	for _, o := range g.coset {
		m := congruent(metric, widen(o.R))
		for i := range 3 {
			for j := range 3 {
				mean[i][j] += m[i][j] / float64(len(g.coset))
			}
		}
	}
	return mean
}

// String writes the six numbers to a thousandth.
func (c Cell) String() string {
	return fmt.Sprintf("%.3f %.3f %.3f %.3f %.3f %.3f", c.A, c.B, c.C, c.Alpha, c.Beta, c.Gamma)
}

// congruent is the metric of the basis whose columns are those of m.
func congruent(g [3][3]float64, m matrix) [3][3]float64 {
	var out [3][3]float64
	for i := range 3 {
		for j := range 3 {
			for p := range 3 {
				for q := range 3 {
					out[i][j] += float64(m[p][i]) * g[p][q] * float64(m[q][j])
				}
			}
		}
	}
	return out
}
