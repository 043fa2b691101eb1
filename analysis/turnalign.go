package analysis

import (
	"fmt"
	"math"
	"strings"

	"thinward/analysis/crystal"
	"thinward/analysis/difference"
	"thinward/analysis/intensity"
)

// align brings the rotation angles of every position of crystal i to those of its
// thinnest one where they count from another zero or the other way, and its indices
// where a rotation of the point group explains that they do not fit: positions that
// were indexed one by one differ so by chance. Without it such observations could
// not be matched and would share neither scale curve nor geometry. Positions with
// no clear alignment stay as they are. Columns are replaced, not changed; the turns
// stand in the positions.
func (s *Study) align(i int, list []Accepted) []intensity.Warning {
	first := -1
	for _, j := range s.Series.Crystals[i].byThickness() {
		if list[j].Observations.Phi != nil {
			first = j
			break
		}
	}
	if first < 0 {
		return nil
	}
	most := 0
	for j := range list {
		most = max(most, list[j].Observations.Len())
	}
	numbers, stride, ways := rawNumbers{}, 1+most/alignSample, s.rotations()
	reference := list[first].Observations
	thin := numbers.of(reference, ways[0], stride)
	var warnings []intensity.Warning
	for j := range list {
		o := list[j].Observations
		if j == first || o.Phi == nil {
			continue
		}
		tolerance := max(reference.FrameWidth(), o.FrameWidth())
		if !(tolerance > 0) {
			tolerance = 1
		}
		a, way := difference.Align(thin, numbers.of(o, ways[0], stride), tolerance), 0
		if !a.Clear && len(ways) > 1 {
			var angled []difference.Angled
			for _, by := range ways {
				angled = append(angled, numbers.of(o, by, stride))
			}
			way, a = difference.AlignAny(thin, angled, tolerance)
		}
		if !a.Turn.Reversed && math.Abs(a.Turn.OffsetDeg) <= tolerance/2 {
			a.Turn = difference.Turn{}
		}
		if !a.Clear || way == 0 && a.Turn.Identity() {
			continue
		}
		text, changed := alignedBy(o, a, ways[way])
		if changed == nil {
			continue
		}
		list[j].Observations, list[j].Turn = changed, a.Turn
		warnings = append(warnings, intensity.Warning{Code: "angles-aligned", Where: s.place(i, j),
			Text: fmt.Sprintf(text, s.Series.Crystals[i].Positions[first].Name)})
	}
	return warnings
}

// alignedBy is o after an alignment; the text has one verb, the name of the reference.
// Both are empty where an index has no image.
func alignedBy(o *intensity.Columns, a *difference.Alignment, by crystal.Reindexing) (string, *intensity.Columns) {
	out := *o
	var did []string
	if !by.Identity() {
		changed, err := reindexed(o, by)
		if err != nil {
			return "", nil
		}
		out = *changed
		did = append(did, fmt.Sprintf("indices are those of another, equivalent setting and became %s", by))
	}
	if !a.Turn.Identity() {
		out.Phi = make([]float64, o.Len())
		for r, phi := range o.Phi {
			out.Phi[r] = a.Turn.Of(phi)
		}
		how := "count from another zero, or the lattice lies turned about the axis,"
		if a.Turn.Reversed {
			how = "run the other way"
		}
		did = append(did, fmt.Sprintf("rotation angles %s and became %s", how, a.Turn))
	}
	return "against position %s, " + strings.Join(did, "; ") + fmt.Sprintf(": that brings %d of %d observations of one index to one angle (by chance %.0f, the next best way %d)",
		a.Within, a.Common, a.Chance, a.RunnerUp), &out
}

// rotations are the ways in which indices may be turned without changing any
// intensity, the identity first: the rotations of the Laue class, or with Friedel mates
// apart those of the point group.
func (s *Study) rotations() []crystal.Reindexing {
	seen := map[[3][3]int]bool{}
	list := []crystal.Reindexing{{M: [3][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, Den: 1}}
	seen[list[0].M] = true
	for _, op := range s.Series.Group.Operators() {
		sign := op.Det()
		if sign < 0 && s.Series.FriedelApart {
			continue
		}
		r := crystal.Reindexing{Den: 1}
		for a := range 3 {
			for b := range 3 {
				r.M[a][b] = sign * int(op.R[a][b])
			}
		}
		if !seen[r.M] {
			seen[r.M] = true
			list = append(list, r)
		}
	}
	return list
}

// rawNumbers numbers indices as measured.
type rawNumbers map[crystal.HKL]int32

// alignSample is the number of observations beyond which a share of the indices is
// enough to align by.
const alignSample = 20000

// of gives numbered indices and angles of c, indices turned by by, of one index in
// stride, drawn by a hash of the index (Knuth 1973, vol. 3, 6.4).
func (n rawNumbers) of(c *intensity.Columns, by crystal.Reindexing, stride int) difference.Angled {
	var out difference.Angled
	for r := range c.I {
		h := crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}
		if !by.Maps(h) {
			continue
		}
		h = by.Apply(h)
		key := uint32(h.H)*73856093 ^ uint32(h.K)*19349663 ^ uint32(h.L)*83492791
		if int(key*2654435769>>8)%stride != 0 {
			continue
		}
		id, ok := n[h]
		if !ok {
			id = int32(len(n))
			n[h] = id
		}
		out.Raw, out.Phi = append(out.Raw, id), append(out.Phi, c.Phi[r])
	}
	return out
}
