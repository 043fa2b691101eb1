package analysis

import (
	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/size"
)

// asking widens intervals by what it costs to ask several questions of which one
// would do: half widths are multiplied so that the chance of any false answer of so
// many stays that of one (Bonferroni; Dunn 1961, J. Am. Stat. Assoc. 56:52).
func asking(list []*ContrastResult, questions int) float64 {
	level := list[0].Strength.Level
	if !(level > 0 && level < 1) {
		level = 0.95
	}
	return zOf(1-(1-level)/float64(max(questions, 1))) / zOf(level)
}

// visible is the least effect that would be seen with 80 % power by a statement that asks for f
// times the usual interval: (f z_.975 + z_.8) se.
func visible(se, f float64) float64 {
	return size.MinimumVisible(se, 2*distuv.UnitNormal.CDF(f*zOf(0.95))-1, 0.8)
}

// side is +1 when an interval about v, its half widths times f, lies above null, -1
// when below, else 0; an open or unknown interval is 0.
func side(v, lo, hi, null, f float64) int {
	switch {
	case v-f*(v-lo) > null:
		return 1
	case v+f*(hi-v) < null:
		return -1
	}
	return 0
}
