package crystal

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"
)

// Intensities is a list of reflections with their intensities, in parallel
// slices; repeats and equivalents are allowed.
type Intensities struct {
	HKL []HKL
	I   []float64
}

// ChoiceSettings are the settings of ChooseIndexing; nil means all defaults.
type ChoiceSettings struct {
	MinPairs      int     // reflections in common below which no choice is made; default 50
	MinZ          float64 // margin below which the choice is called ambiguous; default 4
	PairsPerShell int     // reflections of a resolution shell, whose mean scales it; default 200
}

// IndexingChoice is how well each way of indexing agrees with a reference.
type IndexingChoice struct {
	Best        int       // index into the options
	Correlation []float64 // for each option, NaN where fewer than 4 reflections are in common
	N           []int     // reflections in common, for each option
	Z           float64   // margin of the best over the second best; +Inf when there is one option
	Ambiguous   bool      // too few in common, no agreement, or a margin that is small
	Why         string    // what makes it ambiguous, empty otherwise
}

// ChooseIndexing correlates data, re-indexed by each of the options in turn, with
// a reference, and says which agrees best. Both lists are divided by the mean of
// their resolution shell (so that the fall-off which all indexings share does not
// count as agreement), averaged over the Laue class of g, and compared by the
// product-moment correlation of the signed square root, which keeps the strongest
// few from deciding alone. Forbidden reflections are left out.
//
// The margin is Fisher's (1921) z: (atanh r1 - atanh r2) / sqrt(1/(n1-3) +
// 1/(n2-3)) for the best and the second best. The two share the reference; their
// correlation, when positive, makes the true margin larger. The choice is
// ambiguous when fewer than MinPairs are in common, when the best correlation is
// itself under MinZ standard errors above zero, or when the margin is under MinZ.
//
// Lists of unequal length, empty ones, and intensities that are NaN or infinite
// are errors with the place; so are no options at all.
func ChooseIndexing(g *Group, c Cell, options []Reindexing, reference, data Intensities, set *ChoiceSettings) (*IndexingChoice, error) {
	if len(options) == 0 {
		return nil, errors.New("choice of indexing: no options")
	}
	if err := c.Check(); err != nil {
		return nil, err
	}
	s := ChoiceSettings{MinPairs: 50, MinZ: 4, PairsPerShell: 200}
	if set != nil {
		s.MinPairs = cmp.Or(set.MinPairs, s.MinPairs)
		s.MinZ = cmp.Or(set.MinZ, s.MinZ)
		s.PairsPerShell = cmp.Or(set.PairsPerShell, s.PairsPerShell)
	}
	for _, list := range []struct {
		name string
		Intensities
	}{{"reference", reference}, {"data", data}} {
		if err := list.check(); err != nil {
			return nil, fmt.Errorf("choice of indexing: %s: %w", list.name, err)
		}
	}
	keys, strength := merged(g, reference.HKL, relative(g, c, reference, s.PairsPerShell), nil)
	at := make(map[int64]int, len(keys))
	for i, key := range keys {
		at[key] = i
	}
	ratio := relative(g, c, data, s.PairsPerShell)
	choice := &IndexingChoice{Correlation: make([]float64, len(options)), N: make([]int, len(options))}
	for j := range options {
		own, values := merged(g, data.HKL, ratio, &options[j])
		var x, y []float64
		for i, key := range own {
			if k, ok := at[key]; ok {
				x, y = append(x, signedRoot(strength[k])), append(y, signedRoot(values[i]))
			}
		}
		choice.N[j], choice.Correlation[j] = len(x), correlation(x, y)
	}
	choice.judge(&s)
	return choice, nil
}

func (l Intensities) check() error {
	if len(l.HKL) != len(l.I) {
		return fmt.Errorf("%d reflections and %d intensities", len(l.HKL), len(l.I))
	}
	if len(l.I) == 0 {
		return errors.New("no reflections")
	}
	for i, v := range l.I {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("intensity %d, of %d %d %d, is %g", i, l.HKL[i].H, l.HKL[i].K, l.HKL[i].L, v)
		}
	}
	return nil
}

// relative divides each intensity by the mean of the resolution shell it is in;
// NaN for forbidden reflections and in shells whose mean is not positive.
func relative(g *Group, c Cell, list Intensities, perShell int) []float64 {
	metric := c.ReciprocalMetric()
	type row struct {
		s2 float64
		i  int
	}
	rows := make([]row, 0, len(list.I))
	out := make([]float64, len(list.I))
	for i, h := range list.HKL {
		out[i] = math.NaN()
		if h != (HKL{}) && !g.Absent(h) {
			rows = append(rows, row{InvD2(metric, h), i})
		}
	}
	slices.SortFunc(rows, func(a, b row) int { return cmp.Or(cmp.Compare(a.s2, b.s2), a.i-b.i) })
	shells := max(1, len(rows)/perShell)
	for s := range shells {
		part := rows[s*len(rows)/shells : (s+1)*len(rows)/shells]
		sum := 0.0
		for _, r := range part {
			sum += list.I[r.i]
		}
		mean := sum / float64(len(part))
		if !(mean > 0) {
			continue
		}
		for _, r := range part {
			out[r.i] = list.I[r.i] / mean
		}
	}
	return out
}

// merged averages over equivalents after re-indexing; keys ascend.
func merged(g *Group, hkl []HKL, values []float64, r *Reindexing) (keys []int64, means []float64) {
	type row struct {
		key int64
		i   int
	}
	rows := make([]row, 0, len(hkl))
	for i, h := range hkl {
		if math.IsNaN(values[i]) {
			continue
		}
		if r != nil {
			if !r.Maps(h) {
				continue
			}
			h = r.Apply(h)
		}
		if g.Absent(h) {
			continue
		}
		key, _ := g.best(int64(h.H), int64(h.K), int64(h.L))
		rows = append(rows, row{key, i})
	}
	slices.SortFunc(rows, func(a, b row) int { return cmp.Or(cmp.Compare(a.key, b.key), a.i-b.i) })
	for i := 0; i < len(rows); {
		sum, j := 0.0, i
		for ; j < len(rows) && rows[j].key == rows[i].key; j++ {
			sum += values[rows[j].i]
		}
		keys, means = append(keys, rows[i].key), append(means, sum/float64(j-i))
		i = j
	}
	return keys, means
}

func signedRoot(x float64) float64 { return math.Copysign(math.Sqrt(math.Abs(x)), x) }

// correlation is the product-moment correlation in two passes, NaN for fewer than
// 4 pairs or without spread.
func correlation(x, y []float64) float64 {
	if len(x) < 4 {
		return math.NaN()
	}
	mx, my := 0.0, 0.0
	for i := range x {
		mx += x[i] / float64(len(x))
		my += y[i] / float64(len(x))
	}
	var sxx, syy, sxy float64
	for i := range x {
		sxx += (x[i] - mx) * (x[i] - mx)
		syy += (y[i] - my) * (y[i] - my)
		sxy += (x[i] - mx) * (y[i] - my)
	}
	if sxx == 0 || syy == 0 {
		return math.NaN()
	}
	return sxy / math.Sqrt(sxx*syy)
}

// judge fills in the best option, its margin and whether it can be trusted.
func (c *IndexingChoice) judge(s *ChoiceSettings) {
	second := -1
	for j := 1; j < len(c.Correlation); j++ {
		switch {
		case higher(c.Correlation[j], c.Correlation[c.Best]):
			second, c.Best = c.Best, j
		case second < 0 || higher(c.Correlation[j], c.Correlation[second]):
			second = j
		}
	}
	best, n := c.Correlation[c.Best], c.N[c.Best]
	c.Z = math.Inf(1)
	if second >= 0 {
		c.Z = c.Margin(second)
	}
	switch {
	case n < s.MinPairs:
		c.Why = fmt.Sprintf("%d reflections in common, fewer than %d", n, s.MinPairs)
	case math.IsNaN(best) || fisher(best)*math.Sqrt(float64(n-3)) < s.MinZ:
		c.Why = fmt.Sprintf("no indexing agrees with the reference (best correlation %.3f over %d)", best, n)
	case c.Z < s.MinZ:
		c.Why = fmt.Sprintf("the best two indexings agree about equally with the reference (%.3f and %.3f, z = %.1f)", best, c.Correlation[second], c.Z)
	}
	c.Ambiguous = c.Why != ""
}

// Margin is the z by which the best option lies above option j, 0 where either has
// too little in common to say.
func (c *IndexingChoice) Margin(j int) float64 {
	best, other, n, m := c.Correlation[c.Best], c.Correlation[j], c.N[c.Best], c.N[j]
	if n <= 3 || m <= 3 || math.IsNaN(best) || math.IsNaN(other) {
		return 0
	}
	return (fisher(best) - fisher(other)) / math.Sqrt(1/float64(n-3)+1/float64(m-3))
}

func higher(a, b float64) bool { return a > b || math.IsNaN(b) && !math.IsNaN(a) }

// fisher is atanh r, with perfect correlation held just inside the limit.
func fisher(r float64) float64 { return math.Atanh(max(-1+1e-12, min(1-1e-12, r))) }
