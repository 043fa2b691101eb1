package result

import (
	"fmt"
	"math"

	"thinward/analysis"
)

// ComparePairs compares two lists of pairs row by row under the rules of
// Compare. At most most differences are listed (0 means all); the number of all
// is returned.
func ComparePairs(a, b []analysis.PairRow, relative float64, most int) (list []Difference, n int, largest float64) {
	add := func(d Difference) {
		n++
		if most == 0 || len(list) < most {
			list = append(list, d)
		}
	}
	if len(a) != len(b) {
		add(Difference{Path: "pairs", First: fmt.Sprint(len(a), " rows"), Second: fmt.Sprint(len(b), " rows"), Relative: math.Inf(1)})
		return list, n, 0
	}
	for i := range a {
		x, y := &a[i], &b[i]
		where := fmt.Sprintf("pairs[%s: %s - %s, %d %d %d]", x.Crystal, x.Thin, x.Thick, x.HKL.H, x.HKL.K, x.HKL.L)
		if wx, wy := wordsOf(x), wordsOf(y); wx != wy {
			add(Difference{Path: where, First: wx, Second: wy, Relative: math.Inf(1)})
			continue
		}
		nx, ny := numbersOf(x), numbersOf(y)
		for k := range nx {
			r := relativeDifference(nx[k], ny[k])
			if r > relative {
				add(Difference{Path: where + "." + numberColumns[k], First: text(nx[k]), Second: text(ny[k]), Relative: r, Number: true})
			} else {
				largest = math.Max(largest, r)
			}
		}
	}
	return list, n, largest
}

var numberColumns = [15]string{"d_A", "phi_thin_deg", "phi_thick_deg", "tilt_thin_deg", "tilt_thick_deg", "J_thin", "su_J_thin", "J_thick", "su_J_thick",
	"strength", "strength_inverse_variance", "dI", "su_dI", "eps", "z"}

func numbersOf(r *analysis.PairRow) [15]float64 {
	return [15]float64{r.D, r.PhiThin, r.PhiThick, r.TiltThin, r.TiltThick, r.JThin, r.SUThin, r.JThick, r.SUThick, r.Strength, r.InverseVariance, r.DI, r.SUDI, r.Eps, r.Z}
}

func wordsOf(r *analysis.PairRow) string {
	return fmt.Sprint(r.Crystal, " ", r.Thin, " ", r.Thick, " ", r.HKL, " ", r.NThin, " ", r.NThick, " ", r.Axis, " ", r.Class, " ", r.Flags)
}
