package intensity

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// 10 +- 1, 12 +- 2, 14 +- 1: mean 12, internal standard error 2/3 (own example,
// by hand).
func TestMerge(t *testing.T) {
	s := &Scaled{Unique: []int32{2, 0, 2, 2, 0}, Raw: []int32{1, 2, 3, 4, 5}, I: []float64{10, 7, 12, 14, 100}, Var: []float64{1, 4, 4, 1, math.Inf(1)}}
	before := fmt.Sprint(*s)
	m := Merge(3, s)
	floatcmp.CheckSlice(t, "J", m.J, []float64{7, 0, 12}, 0, 1e-14)
	floatcmp.CheckSlice(t, "Var", m.Var, []float64{4, math.Inf(1), 4. / 9}, 0, 1e-14)
	if fmt.Sprint(m.N) != "[1 0 3]" {
		t.Errorf("N = %v", m.N)
	}
	if fmt.Sprint(*s) != before {
		t.Error("the observations were changed")
	}
	s.Var[4] = 1
	p := MergeOrdinary(3, s)
	floatcmp.CheckSlice(t, "plain J", p.J, []float64{53.5, 0, 12}, 0, 1e-14)
	floatcmp.CheckSlice(t, "plain Var", p.Var, []float64{5. / 4, math.Inf(1), 6. / 9}, 0, 1e-14)
}

func TestMergePanics(t *testing.T) {
	for want, s := range map[string]*Scaled{
		"intensity: Merge: row 0: variance: 0 is not above zero":                                           {Unique: []int32{0}, Raw: []int32{0}, I: []float64{1}, Var: []float64{0}},
		"intensity: Merge: row 0: unique: 3 lies outside 0 to 2":                                           {Unique: []int32{3}, Raw: []int32{0}, I: []float64{1}, Var: []float64{1}},
		"intensity: Merge: observations differ in length: 1 unique, 1 raw, 1 intensity, 0 variance, 0 phi": {Unique: []int32{0}, Raw: []int32{0}, I: []float64{1}},
		"intensity: Merge: row 0: intensity: NaN is not a finite number":                                   {Unique: []int32{0}, Raw: []int32{0}, I: []float64{math.NaN()}, Var: []float64{1}},
		"intensity: Merge: row 0: phi: NaN is not a finite number":                                         {Unique: []int32{0}, Raw: []int32{0}, I: []float64{1}, Var: []float64{1}, Phi: []float64{math.NaN()}},
	} {
		func() {
			defer func() {
				if got := recover(); got != want {
					t.Errorf("panic %v, want %q", got, want)
				}
			}()
			Merge(3, s)
		}()
	}
}

func someScaled(n int) *Scaled {
	r := rand.New(rand.NewPCG(9, 9))
	s := &Scaled{}
	for u := range n {
		for k := range r.IntN(6) {
			for range 1 + r.IntN(2) {
				s.Unique, s.Raw = append(s.Unique, int32(u)), append(s.Raw, int32(6*u+k))
				s.I, s.Var = append(s.I, r.NormFloat64()), append(s.Var, 1)
			}
		}
	}
	return s
}

func TestHalves(t *testing.T) {
	const n = 2000
	s := someScaled(n)
	half := Halves(s, 42)
	side := map[int32]uint8{}
	count := map[int32]*[2]int{}
	first := 0
	for o, raw := range s.Raw {
		if old, ok := side[raw]; ok {
			if old != half[o] {
				t.Fatalf("raw index %d lies in both halves", raw)
			}
			continue
		}
		side[raw] = half[o]
		if count[s.Unique[o]] == nil {
			count[s.Unique[o]] = &[2]int{}
		}
		count[s.Unique[o]][half[o]]++
	}
	singles := 0
	for u, c := range count {
		if d := c[0] - c[1]; d < -1 || d > 1 {
			t.Errorf("reflection %d has %d and %d raw indices in its halves", u, c[0], c[1])
		}
		if c[0]+c[1] == 1 {
			singles++
			first += c[0]
		}
	}
	// Binomial: 4 standard deviations.
	if d := math.Abs(float64(first) - float64(singles)/2); !(d < 2*math.Sqrt(float64(singles))) {
		t.Errorf("%d of %d single indices in the first half", first, singles)
	}
	if fmt.Sprint(half) != fmt.Sprint(Halves(s, 42)) {
		t.Error("the same key gives other halves")
	}
	back := &Scaled{}
	for o := len(s.Raw) - 1; o >= 0; o-- {
		back.Unique, back.Raw = append(back.Unique, s.Unique[o]), append(back.Raw, s.Raw[o])
	}
	for o, k := range Halves(back, 42) {
		if k != side[back.Raw[o]] {
			t.Fatalf("in another order raw index %d lies in the other half", back.Raw[o])
		}
	}
	if fmt.Sprint(half) == fmt.Sprint(Halves(s, 43)) {
		t.Error("another key gives the same halves")
	}
}

func TestMergeHalvesMakeTheWhole(t *testing.T) {
	const n = 500
	s := someScaled(n)
	a, b := MergeHalves(n, s, 1)
	m := Merge(n, s)
	for u := range n {
		if a.N[u]+b.N[u] != m.N[u] {
			t.Fatalf("reflection %d: %d and %d of %d", u, a.N[u], b.N[u], m.N[u])
		}
		if m.N[u] > 0 {
			w := 1/a.Var[u] + 1/b.Var[u]
			floatcmp.Check(t, "J of both halves", (a.J[u]/a.Var[u]+b.J[u]/b.Var[u])/w, m.J[u], 1e-12, 1e-12)
		}
	}
}
