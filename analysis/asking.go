package analysis

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
