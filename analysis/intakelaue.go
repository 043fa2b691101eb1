package analysis

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// LaueOperator is one operation and how well the intensities go with it: the
// correlation of the strengths of reflections that it makes equivalent, each pair
// measured in one position, over N pairs (of each crystal only those of the position
// with most are counted, since its positions show the same reflections).
type LaueOperator struct {
	Operator    string  `json:"operator"`
	N           int     `json:"n"`
	Correlation float64 `json:"correlation"`
	Refused     bool    `json:"refused"`
}

// LaueResult asks whether reflections that the space group makes equivalent are equal,
// operation by operation, before any scaling. Reference is the best correlation that
// repeats and Friedel mates of a position, or any operation, reach, by ReferenceOf.
// Subgroup is the largest one that the intensities allow when an operation is refused,
// empty otherwise. Beyond holds operations of the lattice that the group lacks.
type LaueResult struct {
	Class       string         `json:"laue_class"`
	Reference   float64        `json:"reference"`
	ReferenceOf string         `json:"reference_of"`
	Operators   []LaueOperator `json:"operators"`
	Beyond      []LaueOperator `json:"beyond"`
	Subgroup    string         `json:"subgroup,omitempty"`
	Verdict     string         `json:"verdict"`
	Why         string         `json:"why"`
}

// rowsOfShell is the number of observations over which a local mean is taken, of
// resolution and then of angle; chosen, no source.
const rowsOfShell = 200

// alone is a position by itself: the strength of each reflection, Friedel mates joined,
// as the signed root of the intensity over its local mean.
type alone struct {
	hkl      []crystal.HKL // in ascending order
	strength map[crystal.HKL]float64
	repeats  [][2]float64 // observations of one reflection or of its mate, by two
}

// ofMates is the one of h and its Friedel mate whose first index that is not 0 is positive.
func ofMates(h crystal.HKL) crystal.HKL {
	if h.H < 0 || h.H == 0 && (h.K < 0 || h.K == 0 && h.L < 0) {
		return crystal.HKL{H: -h.H, K: -h.K, L: -h.L}
	}
	return h
}

// alone gives the strengths of a position. Reflections that some rotation of the Laue class
// leaves in place, or that the group forbids, are left out: the former may be equivalent by
// a lower class in ways that general ones are not.
func (s *Study) alone(c *intensity.Columns, ways []crystal.Reindexing) *alone {
	g, metric := s.Series.Group, s.Series.Cell.ReciprocalMetric()
	general := 0
	var rows []int
	s2 := make([]float64, c.Len())
	for r := range c.I {
		h := crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}
		if h == (crystal.HKL{}) || g.Absent(h) {
			continue
		}
		general = max(general, g.Multiplicity(h))
		s2[r] = crystal.InvD2(metric, h)
		rows = append(rows, r)
	}
	ratio := slices.Clone(c.I)
	flatten(ratio, rows, s2)
	if c.Phi != nil {
		flatten(ratio, rows, c.Phi)
	}
	seen := map[crystal.HKL][]float64{}
	out := &alone{strength: map[crystal.HKL]float64{}}
	stride := 1 + len(rows)/laueSample
	for _, r := range rows {
		if stride > 1 && int(s.orbit(crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}, ways))%stride != 0 {
			continue
		}
		h := ofMates(crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])})
		if g.Multiplicity(h) < general || math.IsNaN(ratio[r]) {
			continue
		}
		v := math.Copysign(math.Sqrt(math.Abs(ratio[r])), ratio[r])
		if before := seen[h]; len(before)%2 == 1 {
			out.repeats = append(out.repeats, [2]float64{before[len(before)-1], v})
		}
		seen[h] = append(seen[h], v)
	}
	for h, v := range seen {
		out.strength[h] = mean(v)
		out.hkl = append(out.hkl, h)
	}
	slices.SortFunc(out.hkl, compareHKL)
	return out
}

// laueSample is the number of observations of a position beyond which a share of the
// reflections is enough to ask.
const laueSample = 40000

// orbit numbers what the group and the ways to index the lattice make of a reflection: all of
// it has one number, drawn by a hash (Knuth 1973, vol. 3, 6.4).
func (s *Study) orbit(h crystal.HKL, ways []crystal.Reindexing) uint32 {
	first := s.Series.Group.Canonical(h)
	for _, by := range ways {
		if !by.Maps(h) {
			continue
		}
		if image := s.Series.Group.Canonical(by.Apply(h)); compareHKL(image, first) < 0 {
			first = image
		}
	}
	key := uint32(first.H)*73856093 ^ uint32(first.K)*19349663 ^ uint32(first.L)*83492791
	return key * 2654435769 >> 8
}

// flatten divides the values at the given rows by their mean among neighbours in by; NaN where
// that is not positive.
func flatten(values []float64, rows []int, by []float64) {
	order := slices.Clone(rows)
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(by[a], by[b]) })
	shells := max(1, len(order)/rowsOfShell)
	for k := range shells {
		part := order[k*len(order)/shells : (k+1)*len(order)/shells]
		sum, n := 0.0, 0.0
		for _, r := range part {
			if !math.IsNaN(values[r]) {
				sum, n = sum+values[r], n+1
			}
		}
		for _, r := range part {
			if values[r] /= sum / n; !(sum > 0) {
				values[r] = math.NaN()
			}
		}
	}
}

// pairing gathers pairs over positions and correlates them.
type pairing struct {
	x, y []float64
	n    int
}

// crystal adds the pairs of the positions of one crystal.
func (p *pairing) crystal(positions [][][2]float64) {
	most := 0
	for _, list := range positions {
		most = max(most, len(list))
		for _, v := range list {
			p.x, p.y = append(p.x, v[0]), append(p.y, v[1])
		}
	}
	p.n += most
}

// agreement is the correlation with either member of a pair first.
func (p *pairing) agreement(name string) evidence.LaueAgreement {
	x, y := append(slices.Clone(p.x), p.y...), append(slices.Clone(p.y), p.x...)
	mx, sxx, sxy := mean(x), 0.0, 0.0
	for k := range x {
		sxx += (x[k] - mx) * (x[k] - mx)
		sxy += (x[k] - mx) * (y[k] - mx)
	}
	r := sxy / sxx
	if len(x) == 0 || sxx == 0 {
		r = math.NaN()
	}
	return evidence.LaueAgreement{Name: name, N: p.n, R: r}
}

// pairsUnder are the pairs of reflections that an operation makes equivalent, each once.
func (a *alone) pairsUnder(image func(crystal.HKL) (crystal.HKL, bool)) [][2]float64 {
	var out [][2]float64
	for _, h := range a.hkl {
		to, ok := image(h)
		if to = ofMates(to); !ok || to == h {
			continue
		}
		v, ok := a.strength[to]
		if !ok {
			continue
		}
		// Of a pair that the operation swaps, the one with the lower index first.
		if back, _ := image(to); ofMates(back) == h && compareHKL(to, h) < 0 {
			continue
		}
		out = append(out, [2]float64{a.strength[h], v})
	}
	return out
}

func compareHKL(a, b crystal.HKL) int {
	return cmp.Or(cmp.Compare(a.H, b.H), cmp.Compare(a.K, b.K), cmp.Compare(a.L, b.L))
}

// laue asks the intensities for every operation of the Laue class.
func (s *Study) laue() *LaueResult {
	ways := crystal.AlternativeIndexings(s.Series.Group, s.Series.Cell, latticeToleranceDeg)
	lists := make([][]*alone, len(s.intake.Positions))
	for i := range s.intake.Positions {
		for j := range s.intake.Positions[i] {
			lists[i] = append(lists[i], s.alone(s.intake.Positions[i][j].Observations, ways))
		}
	}
	over := func(name string, of func(*alone) [][2]float64) evidence.LaueAgreement {
		p := &pairing{}
		for i := range lists {
			var positions [][][2]float64
			for _, a := range lists[i] {
				positions = append(positions, of(a))
			}
			p.crystal(positions)
		}
		return p.agreement(name)
	}
	under := func(name string, r crystal.Reindexing) evidence.LaueAgreement {
		return over(name, func(a *alone) [][2]float64 {
			return a.pairsUnder(func(h crystal.HKL) (crystal.HKL, bool) { return r.Apply(h), r.Maps(h) })
		})
	}
	out := &LaueResult{Class: s.Series.Group.LaueClass()}
	rotations := laueRotations(s.Series.Group)
	var operators []evidence.LaueAgreement
	for _, r := range rotations {
		if r.first {
			operators = append(operators, under(r.name, r.by))
		}
	}
	same := over("repeats and Friedel mates", func(a *alone) [][2]float64 { return a.repeats })
	out.reference(same, operators, lists)
	refused := map[string]bool{}
	for _, o := range operators {
		no := o.Refused(out.Reference)
		refused[o.Name] = no
		out.Operators = append(out.Operators, LaueOperator{o.Name, o.N, o.R, no})
		if no {
			out.Subgroup = "found"
		}
	}
	if out.Subgroup != "" {
		out.Subgroup = largestAllowed(s.Series.Group, rotations, refused)
	}
	var beyond []string
	for _, r := range ways {
		if r.Identity() {
			continue
		}
		a := under(r.String(), r)
		out.Beyond = append(out.Beyond, LaueOperator{Operator: a.Name, N: a.N, Correlation: a.R})
		if a.Agrees(out.Reference) {
			beyond = append(beyond, a.Name)
		}
	}
	f := evidence.LaueOf(out.Class, out.Reference, operators, out.Subgroup, beyond)
	out.Verdict, out.Why, s.laueFinding = f.Verdict.String(), f.Why, f
	return out
}

// reference sets what operations are measured by. Where neither repeats nor any operation
// agree, or there are none, it is the same reflection in two positions of a crystal.
func (r *LaueResult) reference(same evidence.LaueAgreement, operators []evidence.LaueAgreement, lists [][]*alone) {
	r.Reference = math.NaN()
	best := func(a evidence.LaueAgreement) {
		if a.N >= 50 && !math.IsNaN(a.R) && !(r.Reference >= a.R) {
			r.Reference, r.ReferenceOf = a.R, a.Name
		}
	}
	best(same)
	for _, o := range operators {
		best(o)
	}
	if r.Reference >= 0.3 {
		return
	}
	p := &pairing{}
	for _, list := range lists {
		var positions [][][2]float64
		for j := 1; j < len(list); j++ {
			var pairs [][2]float64
			for _, h := range list[j].hkl {
				if v, ok := list[j-1].strength[h]; ok {
					pairs = append(pairs, [2]float64{v, list[j].strength[h]})
				}
			}
			positions = append(positions, pairs)
		}
		p.crystal(positions)
	}
	best(p.agreement("the same reflection in two positions of a crystal"))
}

// laueRotation is one rotation of the Laue class, mirrors and the like made proper by the
// inversion. An operation and its inverse make the same pairs; first marks one of the two.
type laueRotation struct {
	by    crystal.Reindexing
	name  string
	first bool
}

// laueRotations lists those of a group but the identity.
func laueRotations(g *crystal.Group) []laueRotation {
	var out []laueRotation
	names := map[[3][3]int]string{}
	for _, o := range g.Operators() {
		m := proper(o)
		r := crystal.Reindexing{M: m, Den: 1}
		if _, ok := names[m]; ok || r.Identity() {
			continue
		}
		name, first := o.String(), true
		for _, q := range out {
			if (crystal.Reindexing{M: product(q.by.M, m), Den: 1}).Identity() {
				name, first = q.name, false
			}
		}
		names[m] = name
		out = append(out, laueRotation{r, name, first})
	}
	return out
}

// proper is the rotation of an operator, or of what the inversion makes of it.
func proper(o crystal.Op) (m [3][3]int) {
	for a := range 3 {
		for b := range 3 {
			m[a][b] = o.Det() * int(o.R[a][b])
		}
	}
	return m
}

func product(a, b [3][3]int) (m [3][3]int) {
	for i := range 3 {
		for j := range 3 {
			for k := range 3 {
				m[i][j] += a[i][k] * b[k][j]
			}
		}
	}
	return m
}

// largestAllowed names the largest subgroup without a refused operation. Two rotations generate
// any group of rotations of a lattice.
func largestAllowed(g *crystal.Group, rotations []laueRotation, refused map[string]bool) string {
	allowed := map[[3][3]int]bool{}
	identity := [3][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
	elements := [][3][3]int{identity}
	for _, r := range rotations {
		allowed[r.by.M] = !refused[r.name]
		elements = append(elements, r.by.M)
	}
	allowed[identity] = true
	best := [][3][3]int{identity}
	for a := range elements {
		for b := range a + 1 {
			span := [][3][3]int{identity}
			whole := true
			for i := 0; i < len(span) && whole; i++ {
				for _, m := range [][3][3]int{elements[a], elements[b]} {
					if next := product(span[i], m); !slices.Contains(span, next) {
						span, whole = append(span, next), whole && allowed[next]
					}
				}
			}
			if whole && len(span) > len(best) {
				best = span
			}
		}
	}
	var ops []crystal.Op
	for _, o := range g.Operators() {
		if slices.Contains(best, proper(o)) {
			ops = append(ops, o)
		}
	}
	sub, err := crystal.FromOperators(ops)
	if err != nil {
		return fmt.Sprintf("one of %d operators", len(ops))
	}
	return fmt.Sprintf("%s (Laue class %s)", sub, sub.LaueClass())
}

// laueFails reports that equivalents of the group are none.
func (s *Study) laueFails() bool { return s.laueFinding.Verdict == evidence.Fails }

// notEquivalent stands for what the scatter of equivalents would say if they were any.
func notEquivalent() evidence.Finding {
	return evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown,
		Why: "equivalents of the space group are not equivalent in these intensities (see \"" + checkLaue + "\"): that they scatter says nothing of sigmas or positions"}
}
