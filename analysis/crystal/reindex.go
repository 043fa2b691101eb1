package crystal

import (
	"cmp"
	"slices"
	"strconv"
	"strings"
)

// Reindexing is another way to index the same lattice: the index row h becomes
// h M / Den.
type Reindexing struct {
	M      [3][3]int
	Den    int            // 1 except for settings in which the lattice rotation mixes centring translations
	Change CellDifference // by how much the cell differs after it; zero for the identity
}

// Apply returns the new index of h. Where Den is not 1, an index that the
// centring forbids may have no whole image; Maps tells, and Apply then rounds
// towards zero.
func (r Reindexing) Apply(h HKL) HKL {
	n := matrix(r.M).row(h)
	if r.Den > 1 {
		return HKL{n.H / r.Den, n.K / r.Den, n.L / r.Den}
	}
	return n
}

// Maps reports whether h has a whole image.
func (r Reindexing) Maps(h HKL) bool {
	n := matrix(r.M).row(h)
	return r.Den <= 1 || n.H%r.Den == 0 && n.K%r.Den == 0 && n.L%r.Den == 0
}

// Identity reports whether r leaves every index as it is.
func (r Reindexing) Identity() bool {
	return r.Den <= 1 && r.M == [3][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
}

// String writes the new index, "k,h,-l" or "(h+k)/2,(h-k)/2,-l".
func (r Reindexing) String() string {
	parts := make([]string, 3)
	for j := range 3 {
		var b strings.Builder
		g := r.Den
		for i := range 3 {
			g = gcd(g, r.M[i][j])
		}
		for i := range 3 {
			writeIndex(&b, r.M[i][j]/g, "hkl"[i])
		}
		parts[j] = b.String()
		if d := r.Den / g; d != 1 {
			parts[j] = "(" + parts[j] + ")/" + strconv.Itoa(d)
		}
	}
	return strings.Join(parts, ",")
}

// AlternativeIndexings returns the ways to index the lattice of g in the cell c
// that give different intensities: one representative of each coset of the Laue
// class in the rotations of the lattice, which may miss the lattice by up to
// toleranceDeg (the angle between a twofold axis and the normal of its net; 0
// for exact ones only). The first is the identity, and alone when the indexing is
// without ambiguity. Friedel mates count as equal, as they nearly are for
// electrons. The representative is the plainest of its coset. The cell should
// pass g.FitsCell; a cell that fails Check gives the identity alone.
func AlternativeIndexings(g *Group, c Cell, toleranceDeg float64) []Reindexing {
	identity := Reindexing{M: [3][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, Den: 1}
	if c.Check() != nil {
		return []Reindexing{identity}
	}
	var laue []rational
	for _, o := range g.coset {
		p, _, _ := properPart(widen(o.R))
		laue = append(laue, rational{p, 1})
	}
	rotations := latticeRotations(g, c, toleranceDeg)
	slices.SortStableFunc(rotations, func(a, b rational) int { return a.compare(b) })
	var seen []rational
	var out []Reindexing
	for _, m := range rotations {
		if slices.Contains(seen, m) {
			continue
		}
		for _, r := range laue {
			seen = append(seen, m.times(r))
		}
		r := Reindexing{M: m.num, Den: m.den}
		if !r.Identity() {
			r.Change = CompareCells(c, reindexedCell(c, m))
		}
		out = append(out, r)
	}
	return out
}

// reindexedCell is the cell that goes with the new indices. Indices transform
// like basis vectors, so the new basis vector j is the sum of M_ij times the old
// one i.
func reindexedCell(c Cell, m rational) Cell {
	g := congruent(c.Metric(), m.num)
	for i := range 3 {
		for j := range 3 {
			g[i][j] /= float64(m.den * m.den)
		}
	}
	return cellOfMetric(g)
}

// compare orders rotations from plain to involved: whole numbers, few terms, few
// signs, l left in its place, then by the entries.
func (r rational) compare(q rational) int {
	key := func(x rational) (k [4]int) {
		if k[0] = x.den; x.num[2][2] == 0 {
			k[3] = 1
		}
		trace := 0
		for i := range 3 {
			trace += x.num[i][i]
			for j := range 3 {
				if v := x.num[i][j]; v != 0 {
					k[1] += abs(v)
					if v < 0 {
						k[2]++
					}
				}
			}
		}
		if trace == 3*x.den {
			k = [4]int{} // the identity comes first
		}
		return k
	}
	a, b := key(r), key(q)
	if d := slices.Compare(a[:], b[:]); d != 0 {
		return d
	}
	for i := range 3 {
		if d := slices.Compare(q.num[i][:], r.num[i][:]); d != 0 {
			return d
		}
	}
	return cmp.Compare(r.den, q.den)
}
