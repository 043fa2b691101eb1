package intensity

import (
	"fmt"
	"math"
)

// Negatives counts observations below -k sigma for k = 0, 1, 2, 3, beside the
// number to be expected from the reported sigmas and Wilson's law with the
// local mean intensity. A list from which negatives were removed has too few of
// them, and what remains of weak reflections is too strong.
type Negatives struct {
	N        int
	Observed [4]int
	Expected [4]float64
	// Near counts the observations in [-1,0), [0,1) and [1,2) sigma, Least is the smallest
	// Near[0] that Near[1] and Near[2] allow. Whatever the true intensities, I/sigma is a
	// mixture of normal laws of variance one, whose log density curves downward by no
	// more than one: (ln f)'' = Var(J/sigma | I/sigma) - 1. So Near[0] >= Near[1]^2/Near[2]/e.
	Near  [3]int
	Least float64
	// Few says that fewer than 0.3 of at least 20 expected lie below zero, as when weak
	// reflections are filled; Missing, that fewer lie there than Least allows as well, by
	// three standard errors: no intensities make that, but removal does.
	Few, Missing bool
	Warnings     []Warning
}

// CountNegatives counts over the allowed observations of one position, on any
// scale that does not vary much: unique as of cat.Assign, i and sigma parallel,
// local means of i/epsilon over the shells, which must be of cat.Shells.
// Observations in a shell whose mean is not above zero count with a mean of
// zero. It panics when the slices differ in length.
func CountNegatives(unique []int32, i, sigma []float64, cat *Catalogue, sh *Shells) *Negatives {
	if len(unique) != len(i) || len(sigma) != len(i) {
		panic("intensity: CountNegatives: columns differ in length")
	}
	mean, count := make([]float64, sh.N), make([]float64, sh.N)
	for o, u := range unique {
		if s := sh.Of[u]; s >= 0 && !cat.Absent[u] {
			mean[s] += i[o] / float64(cat.Epsilon[u])
			count[s]++
		}
	}
	for s := range mean {
		mean[s] = math.Max(mean[s]/count[s], 0)
	}
	law := [2]*tailTable{newTailTable(false), newTailTable(true)}
	n := &Negatives{}
	for o, u := range unique {
		s := sh.Of[u]
		if s < 0 || cat.Absent[u] {
			continue
		}
		n.N++
		table := law[0]
		if cat.Centric[u] {
			table = law[1]
		}
		if z := i[o] / sigma[o]; z >= -1 && z < 2 {
			n.Near[int(math.Floor(z))+1]++
		}
		expected := table.at(sigma[o] / (mean[s] * float64(cat.Epsilon[u])))
		for k := range n.Observed {
			if i[o] < -float64(k)*sigma[o] {
				n.Observed[k]++
			}
			n.Expected[k] += expected[k]
		}
	}
	n.Few = n.Expected[0] >= 20 && float64(n.Observed[0]) < 0.3*n.Expected[0]
	removed := n.broken()
	if n.Missing = n.Few && removed; n.Missing {
		n.Warnings = append(n.Warnings, Warning{Code: "negatives-missing", Text: fmt.Sprintf(
			"%d of %d observations lie below zero where the sigmas lead one to expect about %.0f: negatives look removed or set to zero, which makes weak reflections too strong", n.Observed[0], n.N, n.Expected[0])})
	}
	return n
}

// broken sets Least and says whether Near[0] lies three standard errors below it.
func (n *Negatives) broken() bool {
	below, above, next := float64(n.Near[0]), float64(n.Near[1]), float64(n.Near[2])
	if above == 0 || next == 0 {
		return false
	}
	n.Least = above * above / next / math.E
	variance := math.Max(below, n.Least) + n.Least*n.Least*(4/above+1/next)
	return n.Least-below > 3*math.Sqrt(variance)
}

// tailTable holds the share observed below -k sigma against ln(sigma/mean).
type tailTable struct{ value [][4]float64 }

const (
	tailFirst = -12.0
	tailStep  = 0.05
	tailCount = 481
)

func newTailTable(centric bool) *tailTable {
	t := &tailTable{make([][4]float64, tailCount)}
	for j := range t.value {
		sigma := math.Exp(tailFirst + tailStep*float64(j))
		for k := range t.value[j] {
			t.value[j][k] = WilsonNoisyBelow(-float64(k)*sigma, sigma, centric)
		}
	}
	return t
}

func (t *tailTable) at(ratio float64) [4]float64 {
	x := (math.Log(ratio) - tailFirst) / tailStep
	if !(x > 0) {
		return t.value[0]
	}
	if x >= tailCount-1 {
		return t.value[tailCount-1]
	}
	j := int(x)
	f := x - float64(j)
	var out [4]float64
	for k := range out {
		out[k] = (1-f)*t.value[j][k] + f*t.value[j+1][k]
	}
	return out
}
