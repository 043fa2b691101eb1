package difference

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Turn brings rotation angles of one position to those of another:
// OffsetDeg + phi, or OffsetDeg - phi where the rotation ran the other way.
type Turn struct {
	Reversed  bool
	OffsetDeg float64
}

// Identity reports whether t changes nothing.
func (t Turn) Identity() bool { return t == Turn{} }

// Of returns the angle in degrees that phi becomes.
func (t Turn) Of(phi float64) float64 {
	if t.Reversed {
		return t.OffsetDeg - phi
	}
	return t.OffsetDeg + phi
}

// String gives the turn as "angle - 12.5 degrees" or "40 degrees - angle".
func (t Turn) String() string {
	switch {
	case t.Identity():
		return "angle"
	case t.Reversed:
		return fmt.Sprintf("%.4g degrees - angle", t.OffsetDeg)
	case t.OffsetDeg < 0:
		return fmt.Sprintf("angle - %.4g degrees", -t.OffsetDeg)
	}
	return fmt.Sprintf("angle + %.4g degrees", t.OffsetDeg)
}

// Angled are the indices as measured, by number, and angles in degrees of one
// position; both of one length.
type Angled struct {
	Raw []int32
	Phi []float64
}

// Alignment is what the common indices of two positions say of their angles.
type Alignment struct {
	Turn Turn
	// Common counts the couples of observations with one index, Within those that
	// Turn brings within the tolerance, Chance how many of them angles
	// unrelated to the index would, RunnerUp those within the tolerance of the
	// best other turn.
	Common, Within, RunnerUp int
	Chance                   float64
	// Clear says that Turn is known: Within is far above Chance and RunnerUp, and
	// no small part of Common. Why says what is missing.
	Clear bool
	Why   string
}

const (
	// alignClear is how many standard errors the couples of an alignment lie above
	// chance and above those of any other, and alignRatio how many times the other
	// they are: mates of one reflection that the nearly flat sphere of electrons
	// meets at nearly one angle draw a broad second peak.
	alignClear = 5
	alignRatio = 1.5
	// alignShare is the least part of the common couples that an alignment explains.
	alignShare = 0.25
	// alignSample is the number of observations beyond which a share of the
	// indices is looked at.
	alignSample = 20000
)

// Align looks for the one turn of the angles of thick that makes observations of
// the same index coincide with those of thin: the mode of phi_thin - phi_thick and
// of phi_thin + phi_thick over all couples of one index, the densest window of
// twice the tolerance (in degrees), and then the median of what lies within twice the
// tolerance of its middle. A position against itself gives an offset of 0. It panics
// when the columns of a position differ in length or the tolerance is not above zero.
func Align(thin, thick Angled, toleranceDeg float64) *Alignment {
	if len(thin.Raw) != len(thin.Phi) || len(thick.Raw) != len(thick.Phi) || !(toleranceDeg > 0) {
		panic("difference: Align: columns of unequal length, or no tolerance")
	}
	couples := coupled(thin, thick)
	out := &Alignment{Common: len(couples)}
	var found [2]peak
	sorted := [2][]float64{make([]float64, len(couples)), make([]float64, len(couples))}
	for i, c := range couples {
		sorted[0][i], sorted[1][i] = c[0]-c[1], c[0]+c[1]
	}
	for k := range found {
		slices.Sort(sorted[k])
		found[k] = densest(sorted[k], toleranceDeg, math.NaN())
	}
	best := 0
	if found[1].n > found[0].n {
		best = 1
	}
	if found[best].n == 0 {
		out.judge()
		return out
	}
	at := sharpen(sorted[best], found[best].at, toleranceDeg)
	out.Turn = Turn{Reversed: best == 1, OffsetDeg: at}
	out.Within = within(sorted[best], at, toleranceDeg)
	out.RunnerUp = max(found[1-best].n, densest(sorted[best], toleranceDeg, at).n)
	out.Chance = float64(len(couples)) * byChance(couples, out.Turn, toleranceDeg)
	out.judge()
	return out
}

// AlignAny aligns every way to index thick and returns the one that brings most couples
// within the tolerance, RunnerUp counting what the other ways do. It panics as Align does
// and without a way.
func AlignAny(thin Angled, ways []Angled, toleranceDeg float64) (way int, best *Alignment) {
	list := make([]*Alignment, len(ways))
	for k := range ways {
		list[k] = Align(thin, ways[k], toleranceDeg)
		if list[k].Within > list[way].Within {
			way = k
		}
	}
	best = list[way]
	for k, a := range list {
		if k != way {
			best.RunnerUp = max(best.RunnerUp, a.Within)
		}
	}
	best.Clear, best.Why = false, ""
	best.judge()
	return way, best
}

func (a *Alignment) judge() {
	n, other := float64(a.Within), float64(a.RunnerUp)
	switch {
	case a.Within == 0:
		a.Why = "no index was measured in both positions"
	case n < alignShare*float64(a.Common):
		a.Why = fmt.Sprintf("no one offset brings more than %d of %d observations of one index to one angle", a.Within, a.Common)
	case n < a.Chance+alignClear*math.Sqrt(a.Chance+1):
		a.Why = fmt.Sprintf("the best offset brings %d of %d observations of one index to one angle, and %.0f would be brought by chance", a.Within, a.Common, a.Chance)
	case n < alignRatio*other || n < other+alignClear*math.Sqrt(n+other):
		a.Why = fmt.Sprintf("the best offset brings %d of %d observations of one index to one angle, and another one %d: it is ambiguous", a.Within, a.Common, a.RunnerUp)
	default:
		a.Clear = true
	}
}

// coupled lists the angles of thin and thick of every couple of observations with
// one index, of a share of the indices where there are many.
func coupled(thin, thick Angled) [][2]float64 {
	stride := uint32(1 + max(len(thin.Raw), len(thick.Raw))/alignSample)
	a, b := byRaw(thin, stride), byRaw(thick, stride)
	var out [][2]float64
	for i, j := 0, 0; i < len(a) && j < len(b); {
		x, y := thin.Raw[a[i]], thick.Raw[b[j]]
		if x != y {
			if x < y {
				i++
			} else {
				j++
			}
			continue
		}
		n := j
		for ; n < len(b) && thick.Raw[b[n]] == x; n++ {
			out = append(out, [2]float64{thin.Phi[a[i]], thick.Phi[b[n]]})
		}
		i++
		if i == len(a) || thin.Raw[a[i]] != x {
			j = n
		}
	}
	return out
}

// byRaw gives the rows of one in stride indices in ascending order of index and
// angle. Neighbouring numbers are neighbours in the lattice, so they are mixed first
// (multiplicative hashing; Knuth 1973, vol. 3, 6.4).
func byRaw(s Angled, stride uint32) []int32 {
	var rows []int32
	for o, r := range s.Raw {
		if (uint32(r)*2654435769>>8)%stride == 0 {
			rows = append(rows, int32(o))
		}
	}
	slices.SortFunc(rows, func(x, y int32) int {
		return cmp.Or(cmp.Compare(s.Raw[x], s.Raw[y]), cmp.Compare(s.Phi[x], s.Phi[y]), cmp.Compare(x, y))
	})
	return rows
}

// peak is the middle of a window and how many values it holds.
type peak struct {
	at float64
	n  int
}

// densest is the window of twice the tolerance that holds most of the sorted values;
// windows whose middle lies within four times the tolerance of not (NaN for none) are
// passed over.
func densest(sorted []float64, tolerance, not float64) peak {
	var best peak
	hi := 0
	for lo := range sorted {
		for hi < len(sorted) && sorted[hi] <= sorted[lo]+2*tolerance {
			hi++
		}
		at := (sorted[lo] + sorted[hi-1]) / 2
		if hi-lo > best.n && !(math.Abs(at-not) <= 4*tolerance) {
			best = peak{at, hi - lo}
		}
	}
	return best
}

// sharpen moves at to the median of what lies within twice the tolerance of it.
func sharpen(sorted []float64, at, tolerance float64) float64 {
	for range 3 {
		lo, _ := slices.BinarySearch(sorted, at-2*tolerance)
		hi, _ := slices.BinarySearch(sorted, at+2*tolerance)
		if hi <= lo {
			return at
		}
		at = (sorted[(lo+hi-1)/2] + sorted[(lo+hi)/2]) / 2
	}
	return at
}

func within(sorted []float64, at, tolerance float64) int {
	lo, _ := slices.BinarySearch(sorted, at-tolerance)
	hi, _ := slices.BinarySearch(sorted, math.Nextafter(at+tolerance, math.Inf(1)))
	return hi - lo
}

// byChance is the probability that an angle of a couple of thin, and the angle of thick
// of any other couple, lie within the tolerance after the turn.
func byChance(couples [][2]float64, t Turn, tolerance float64) float64 {
	a, b := make([]float64, len(couples)), make([]float64, len(couples))
	for i, c := range couples {
		a[i], b[i] = c[0], t.Of(c[1])
	}
	return chanceOf(a, b, tolerance)
}

// chanceOf is the share of all couples of one of a and one of b that lie within the
// tolerance of each other; 0 when either is empty. It sorts them.
func chanceOf(a, b []float64, tolerance float64) float64 {
	if len(a) == 0 || len(b) == 0 {
		return 0
	}
	slices.Sort(a)
	slices.Sort(b)
	lo, hi, sum := 0, 0, 0.0
	for _, x := range a {
		for lo < len(b) && b[lo] < x-tolerance {
			lo++
		}
		for hi < len(b) && b[hi] <= x+tolerance {
			hi++
		}
		sum += float64(hi - lo)
	}
	return sum / (float64(len(a)) * float64(len(b)))
}
