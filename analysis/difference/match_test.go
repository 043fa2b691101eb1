package difference

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// changed is s with every angle put through f.
func changed(s *intensity.Scaled, f func(float64) float64) *intensity.Scaled {
	out := *s
	out.Phi = make([]float64, len(s.Phi))
	for o, phi := range s.Phi {
		out.Phi[o] = f(phi)
	}
	return &out
}

// rows is s without the observations that keep refuses.
func rows(s *intensity.Scaled, keep func(o int) bool) *intensity.Scaled {
	out := &intensity.Scaled{}
	for o := range s.I {
		if keep(o) {
			out.Unique, out.Raw = append(out.Unique, s.Unique[o]), append(out.Raw, s.Raw[o])
			out.I, out.Var, out.Phi = append(out.I, s.I[o]), append(out.Var, s.Var[o]), append(out.Phi, s.Phi[o])
		}
	}
	return out
}

func together(list ...*intensity.Scaled) *intensity.Scaled {
	out := &intensity.Scaled{}
	for _, s := range list {
		out.Unique, out.Raw = append(out.Unique, s.Unique...), append(out.Raw, s.Raw...)
		out.I, out.Var, out.Phi = append(out.I, s.I...), append(out.Var, s.Var...), append(out.Phi, s.Phi...)
	}
	return out
}

// checkCounts adds up where the observations of both positions went.
func checkCounts(t *testing.T, p *Pairs) {
	t.Helper()
	for _, c := range []struct {
		name  string
		given int
		side  SideCounts
		n     []int32
	}{{"thin", p.Counts.ThinObservations, p.Counts.Thin, p.NThin}, {"thick", p.Counts.ThickObservations, p.Counts.Thick, p.NThick}} {
		if sum := c.side.Absent + c.side.WithoutWeight + c.side.OutsideRange + c.side.Alone + c.side.Unusable + c.side.Used; sum != c.given {
			t.Errorf("%s: %+v adds up to %d of %d", c.name, c.side, sum, c.given)
		}
		used := 0
		for _, n := range c.n {
			used += int(n)
		}
		if used != c.side.Used {
			t.Errorf("%s: %d used, the pairs hold %d", c.name, c.side.Used, used)
		}
		for _, v := range []int{c.side.Absent, c.side.WithoutWeight, c.side.OutsideRange, c.side.Alone, c.side.Unusable, c.side.Used} {
			if v < 0 {
				t.Errorf("%s: %+v", c.name, c.side)
			}
		}
	}
	if p.Counts.Pairs+p.Counts.Unusable > p.Counts.Common || p.Counts.Pairs != p.Len() {
		t.Errorf("%d pairs: %+v", p.Len(), p.Counts)
	}
}

func codes(p *Pairs) string {
	var list []string
	for _, w := range p.Warnings {
		list = append(list, w.Code)
	}
	return strings.Join(list, " ")
}

// Angles that count from another zero, or the other way, are found and matched as if
// they did not; the pairs are those without the change.
func TestPairTurnsAngles(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	plain := mustPair(t, thin, thick, w.cat, &Settings{SameCrystal: true})
	checkCounts(t, plain)
	for _, c := range []struct {
		name string
		turn Turn // of the true angle to the one given
		back Turn
		word string
	}{
		{"as it is", Turn{}, Turn{}, ""},
		{"counts from the start of the scan", Turn{OffsetDeg: 60}, Turn{OffsetDeg: -60}, "angle - "},
		{"two frames off", Turn{OffsetDeg: -3.25}, Turn{OffsetDeg: 3.25}, "angle + 3.2"},
		{"reversed", Turn{Reversed: true}, Turn{Reversed: true}, "degrees - angle"},
		{"reversed from the end of the scan", Turn{true, 60}, Turn{true, 60}, "60 degrees - angle"},
	} {
		p := mustPair(t, thin, changed(thick, c.turn.Of), w.cat, &Settings{SameCrystal: true})
		checkCounts(t, p)
		if !p.Matched || (c.word == "") != (len(p.Warnings) == 0) || c.word != "" && (codes(p) != "angles-aligned" || !strings.Contains(p.Warnings[0].Text, c.word)) {
			t.Errorf("%s: matched %v, %v", c.name, p.Matched, p.Warnings)
		}
		if c.turn.Identity() {
			continue
		}
		a := Align(Angled{thin.Raw, thin.Phi}, Angled{thick.Raw, changed(thick, c.turn.Of).Phi}, 1)
		if a.Turn.Reversed != c.back.Reversed || !a.Clear {
			t.Errorf("%s: %+v", c.name, a)
		}
		// Angles scatter by 0.14 degrees about each other; the median of a thousand.
		floatcmp.Check(t, c.name, a.Turn.OffsetDeg, c.back.OffsetDeg, 0.02, 0)
		if float64(p.Counts.MatchedObservations) < 0.99*float64(plain.Counts.MatchedObservations) || p.Len() < plain.Len()-1 {
			t.Errorf("%s: %d matched of %d", c.name, p.Counts.MatchedObservations, plain.Counts.MatchedObservations)
		}
		same := 0
		for i, d := range p.D() {
			if p.Len() == plain.Len() && p.NThin[i] == plain.NThin[i] && math.Abs(d-plain.Thin[i]+plain.Thick[i]) < 1e-12 {
				same++
			}
		}
		if float64(same) < 0.98*float64(plain.Len()) {
			t.Errorf("%s: %d of %d pairs are those without the turn", c.name, same, plain.Len())
		}
		floatcmp.Check(t, c.name+": angles are those of thin", p.Phi[0], plain.Phi[0], 1e-9, 0)
	}
}

// Unrelated angles, or two turns that explain equally much, match nothing however many
// fall together by chance.
func TestPairRefusesChance(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	other := w.position(invention{seed: 3, crystal: 2, gain: 100, background: 0.2})
	half := changed(thick, func(phi float64) float64 { return phi })
	for o := range half.Phi {
		if half.Raw[o]%2 == 0 {
			half.Phi[o] += 40
		}
	}
	r := rand.New(rand.NewPCG(4, 4))
	narrow := func(s *intensity.Scaled) *intensity.Scaled {
		return changed(s, func(float64) float64 { return 4 * r.Float64() })
	}
	for _, c := range []struct {
		name        string
		thin, thick *intensity.Scaled
		tolerance   float64
		word        string
	}{
		{"unrelated", thin, other, 1, "brings"},
		{"unrelated, broad tolerance", thin, other, 15, "by chance"},
		{"two turns at once", thin, half, 0.5, ""},
		{"narrow scans", narrow(thin), narrow(thick), 1, "by chance"},
		{"within one frame", narrow(thin), narrow(thick), 4, "too little"},
		{"a column of zeros", changed(thin, func(float64) float64 { return 0 }), changed(thick, func(float64) float64 { return 0 }), 1, "too little"},
	} {
		p := mustPair(t, c.thin, c.thick, w.cat, &Settings{SameCrystal: true, AngleToleranceDeg: c.tolerance})
		checkCounts(t, p)
		if c.word == "" {
			// Half of the indices coincide as they are: those are matched, and the others named.
			if !p.Matched || !strings.Contains(codes(p), "unpartnered") {
				t.Errorf("%s: matched %v, %v", c.name, p.Matched, p.Warnings)
			}
			continue
		}
		if p.Matched || codes(p) != "merged" || !strings.Contains(p.Warnings[0].Text, c.word) {
			t.Errorf("%s: matched %v, %v", c.name, p.Matched, p.Warnings)
		}
		if _, err := Pair(context.Background(), c.thin, c.thick, w.cat, &Settings{SameCrystal: true, Matching: MatchAlways, AngleToleranceDeg: c.tolerance}); err == nil {
			t.Errorf("%s: matched on demand", c.name)
		}
	}
	both := changed(half, func(phi float64) float64 { return phi - 20 })
	if a := Align(Angled{thin.Raw, thin.Phi}, Angled{both.Raw, both.Phi}, 1); a.Clear || !strings.Contains(a.Why, "ambiguous") || a.RunnerUp < a.Within/2 {
		t.Errorf("%+v", a)
	}
	p := mustPair(t, thin, both, w.cat, &Settings{SameCrystal: true})
	if p.Matched || !strings.Contains(p.Warnings[0].Text, "ambiguous") {
		t.Errorf("%v", p.Warnings)
	}
}

// A reversed scan read as it stands matches only where the scans cross; the share is
// less than unrelated angles would give.
func TestOppositeScansDoNotMatchByChance(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	back := changed(w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2}), func(phi float64) float64 { return -phi })
	p := &Pairs{source: source{thin: thin, thick: back, catalogue: w.cat, settings: (&Settings{SameCrystal: true, AngleToleranceDeg: 12, LeastMatched: 0.1}).filled()}}
	p.count(intensity.Merge(w.cat.Len(), thin), intensity.Merge(w.cat.Len(), back))
	if why := p.match(Turn{}); !strings.Contains(why, "by chance") {
		t.Errorf("%q with %d matched", why, p.Counts.MatchedObservations)
	}
	if why := p.match(Turn{Reversed: true}); why != "" {
		t.Error(why)
	}
}

// The expected number of couples by chance, counted by brute force.
func TestChance(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 9))
	var a, b []float64
	for range 40 {
		a = append(a, 30*r.Float64())
	}
	for range 23 {
		b = append(b, 10+30*r.Float64())
	}
	n := 0.0
	for _, x := range a {
		for _, y := range b {
			if math.Abs(x-y) <= 2.5 {
				n++
			}
		}
	}
	floatcmp.Check(t, "chance", chanceOf(a, b, 2.5), n/(40*23), 0, 1e-14)
	floatcmp.Check(t, "nothing", chanceOf(nil, b, 2.5), 0, 0, 0)
}

// Repeats of an index at one angle are averaged, and none is left over; the pair is that
// of the mean with the variance of the mean.
func TestPairAveragesRepeats(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	again := w.position(invention{seed: 5, crystal: 1, gain: 50, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	mean := &intensity.Scaled{Unique: thin.Unique, Raw: thin.Raw}
	for o := range thin.I {
		a, b := 1/thin.Var[o], 1/again.Var[o]
		mean.I = append(mean.I, (a*thin.I[o]+b*again.I[o])/(a+b))
		mean.Var = append(mean.Var, 1/(a+b))
		mean.Phi = append(mean.Phi, (thin.Phi[o]+again.Phi[o])/2)
	}
	set := &Settings{SameCrystal: true}
	want := mustPair(t, mean, thick, w.cat, set)
	p := mustPair(t, together(thin, again), thick, w.cat, set)
	checkCounts(t, p)
	if len(p.Warnings) != 0 || p.Len() != want.Len() || p.Counts.MatchedObservations != want.Counts.MatchedObservations {
		t.Fatalf("%d pairs of %d, %v", p.Len(), want.Len(), p.Warnings)
	}
	for i := range p.Thin {
		for _, c := range [][2]float64{{p.Thin[i], want.Thin[i]}, {p.Thick[i], want.Thick[i]}, {p.VarThin[i], want.VarThin[i]}, {p.VarThick[i], want.VarThick[i]}, {p.Phi[i], want.Phi[i]}} {
			floatcmp.Check(t, "averaged", c[0], c[1], 1e-12, 1e-12)
		}
		if p.NThin[i] != 2*want.NThin[i] || p.NThick[i] != want.NThick[i] {
			t.Fatalf("%d and %d observations, want %d and %d", p.NThin[i], p.NThick[i], 2*want.NThin[i], want.NThick[i])
		}
	}
	// A second pass at other angles is no repeat: it has no partner and is said to have none.
	far := changed(again, func(phi float64) float64 { return math.Mod(phi+90, 60) - 30 })
	p = mustPair(t, together(thin, far), thick, w.cat, set)
	checkCounts(t, p)
	if codes(p) != "unpartnered" || !strings.Contains(p.Warnings[0].Text, "thin position") {
		t.Errorf("%v", p.Warnings)
	}
}

// Of scans that overlap in part only the common angles count, and that is said.
func TestPairKeepsTheCommonAngles(t *testing.T) {
	w := newTruth(t, 0.05)
	whole := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	part := rows(thick, func(o int) bool { return thick.Phi[o] > 20 })
	p := mustPair(t, whole, part, w.cat, &Settings{SameCrystal: true})
	checkCounts(t, p)
	if !p.Matched || codes(p) != "outside-range" || p.Counts.Thin.OutsideRange == 0 || p.Counts.Thick.OutsideRange != 0 {
		t.Errorf("matched %v, %v, %+v", p.Matched, p.Warnings, p.Counts)
	}
	for i, phi := range p.Phi {
		if !(phi > 18.5) {
			t.Fatalf("pair %d at %g degrees", i, phi)
		}
	}
	// So few that most reflections would be lost: merged, and all are used.
	other := w.position(invention{seed: 3, crystal: 2, gain: 100, background: 0.2})
	sliver := together(rows(thick, func(o int) bool { return thick.Phi[o] > 57 }), changed(other, func(phi float64) float64 { return phi + 200 }))
	p = mustPair(t, whole, sliver, w.cat, &Settings{SameCrystal: true})
	checkCounts(t, p)
	if p.Matched || codes(p) != "merged" || p.Counts.Thin.Used != p.Counts.ThinObservations-p.Counts.Thin.Absent {
		t.Errorf("matched %v, %v, %+v", p.Matched, p.Warnings, p.Counts)
	}
}

// With weights of 0 an observation is counted and used nowhere.
func TestPairCountsWhatHasNoWeight(t *testing.T) {
	cat, ids := small(t)
	a, b, c := crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: 2, K: 2, L: 3}, crystal.HKL{H: 4}
	thin, thick := &intensity.Scaled{}, &intensity.Scaled{}
	thin.Unique, thin.Raw = ids(a, b, b, c)
	thin.I, thin.Var, thin.Phi = []float64{10, 20, 30, 40}, []float64{1, math.Inf(1), 1, 1}, []float64{1, 10, 10.2, 20}
	thick.Unique, thick.Raw = ids(a, b, c)
	thick.I, thick.Var, thick.Phi = []float64{11, 21, 41}, []float64{1, 1, 1}, []float64{1, 10, 20}
	for _, how := range []Matching{MatchAuto, MatchNever} {
		p := mustPair(t, thin, thick, cat, &Settings{SameCrystal: true, AngleToleranceDeg: 0.5, Shells: 1, Matching: how})
		checkCounts(t, p)
		if p.Counts.Thin.WithoutWeight != 1 || p.Counts.Thin.Used != 3 || p.Matched != (how == MatchAuto) {
			t.Errorf("%+v", p.Counts)
		}
	}
}

func TestTurn(t *testing.T) {
	for _, c := range []struct {
		turn Turn
		of7  float64
		text string
	}{{Turn{}, 7, "angle"}, {Turn{OffsetDeg: 2.5}, 9.5, "angle + 2.5 degrees"}, {Turn{OffsetDeg: -2.5}, 4.5, "angle - 2.5 degrees"}, {Turn{true, -3}, -10, "-3 degrees - angle"}} {
		floatcmp.Check(t, c.text, c.turn.Of(7), c.of7, 0, 0)
		if c.turn.String() != c.text || c.turn.Identity() != (c.text == "angle") {
			t.Errorf("%q, want %q", c.turn, c.text)
		}
	}
	if a := Align(Angled{[]int32{1}, []float64{1}}, Angled{[]int32{2}, []float64{1}}, 1); a.Clear || a.Why == "" {
		t.Errorf("%+v", a)
	}
	defer func() {
		if r := fmt.Sprint(recover()); !strings.Contains(r, "difference: Align") {
			t.Error(r)
		}
	}()
	Align(Angled{[]int32{1}, nil}, Angled{}, 1)
}
