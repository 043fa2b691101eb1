package analysis

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/pool"
	"thinward/analysis/simulate"
)

// needed must be the inverse of pool.Design.SEFor, which is tested by itself.
func TestNeededInvertsSEFor(t *testing.T) {
	for _, d := range []pool.Design{
		{SE: 0.02, Pairs: 1500, Multiplicity: 4, NoiseShare: 0.6},
		{SE: 0.05, Pairs: 300, Multiplicity: 2, NoiseShare: 1},
		{SE: 0.02, Pairs: 1500, Multiplicity: 4, NoiseShare: 0.6, Tau: 0.01},
	} {
		for _, m := range []float64{0.02, 0.05, 0.1} {
			for _, k := range []float64{1, 3, 12} {
				pairs, mult := needed(d, m, k, 0.05, 0.8)
				if !math.IsInf(pairs, 1) {
					floatcmp.Check(t, "seen with these pairs", pool.Visible(d.SEFor(k, pairs, d.Multiplicity), 0.05, 0.8), m, 0, 1e-12)
				}
				if !math.IsInf(mult, 1) {
					floatcmp.Check(t, "seen at this multiplicity", pool.Visible(d.SEFor(k, d.Pairs, mult), 0.05, 0.8), m, 0, 1e-12)
				} else if pool.Visible(d.SEFor(k, d.Pairs, 1e12), 0.05, 0.8) < m*(1-1e-6) {
					t.Errorf("%+v: m %g with %g crystals is said to be out of reach", d, m, k)
				}
			}
		}
	}
	pairs, mult := needed(pool.Design{SE: 0.02, Pairs: 100, Multiplicity: 4, NoiseShare: 0.5, Tau: 0.1}, 0.01, 1, 0.05, 0.8)
	if !math.IsInf(pairs, 1) || !math.IsInf(mult, 1) {
		t.Errorf("the spread alone hides m, yet %g pairs or multiplicity %g are said to do", pairs, mult)
	}
}

func smallPlan(crystals int) *simulate.Plan {
	p := simulate.Tarn()
	for len(p.Crystals) < crystals {
		c := p.Crystals[len(p.Crystals)%3]
		c.Name = "M" + string(rune('0'+len(p.Crystals)))
		p.Crystals = append(p.Crystals, c)
	}
	p.Crystals = p.Crystals[:crystals]
	p.DMin = 1.6
	return p
}

func TestPlan(t *testing.T) {
	s := studyOf(t, smallPlan(3), &Settings{Replicates: 50, Flips: 50})
	p, err := s.Plan(context.Background(), &PlanSettings{M: 0.04})
	if err != nil {
		t.Fatal(err)
	}
	if len(p.Measured) != 3 || len(p.Needs) != 6 || p.Needs[3].M != 0.04 || len(p.Table) != 36 || len(p.Curve) != 20 {
		t.Fatalf("%d crystals, %d needs, %d cells, %d points", len(p.Measured), len(p.Needs), len(p.Table), len(p.Curve))
	}
	floatcmp.Check(t, "seen with three", p.Seen, p.Curve[2].Seen, 0, 1e-15)
	floatcmp.Check(t, "seen with one", p.Curve[0].Seen, p.Typical.Seen, 0, 1e-12)
	for _, k := range p.Measured {
		if !(k.NoiseShare > 0 && k.NoiseShare <= 1) || int(k.Pairs) > k.Possible || !(k.Multiplicity >= 1) {
			t.Errorf("%+v", k)
		}
	}
	for i := range p.Needs {
		n := &p.Needs[i]
		if i > 0 && n.Crystals > p.Needs[i-1].Crystals {
			t.Errorf("a larger m needs more crystals: %+v", p.Needs)
		}
		if k := n.Crystals; k <= len(p.Curve) && (p.Curve[k-1].Seen > n.M*(1+1e-9) || k > 1 && p.Curve[k-2].Seen <= n.M) {
			t.Errorf("m %g: %d crystals is not the smallest number", n.M, k)
		}
	}
	for i := range p.Curve {
		c := &p.Curve[i]
		if !(c.TwicePairs < c.TwiceMultiplicity) || !(c.TwiceMultiplicity < c.Seen) {
			t.Errorf("%d crystals: pairs must help more than multiplicity: %+v", i+1, *c)
		}
	}
	if !strings.Contains(p.TauWhy, "not estimable from 3 crystals") || p.Tau != 0 {
		t.Errorf("spread %g, %q", p.Tau, p.TauWhy)
	}
	checkWide(t, p)
	given, err := s.Plan(context.Background(), &PlanSettings{M: 0.04, Spread: 0.05})
	if err != nil {
		t.Fatal(err)
	}
	if given.Wide != nil || given.Tau != 0.05 || !strings.Contains(given.Cautions[0], "taken as 0.050, as given") {
		t.Errorf("a spread that is given: %g, %q", given.Tau, given.Cautions)
	}
	floatcmp.Check(t, "seen by one at that spread", given.Curve[0].Seen, pool.Visible(math.Hypot(p.Typical.SE, 0.05), 0.05, 0.8), 0, 1e-12)
}

// Three crystals that do not tell their spread are planned for none and for the most that
// their estimates allow.
func checkWide(t *testing.T, p *Planning) {
	t.Helper()
	tau, says := p.TauHi, "the most that these 3 crystals allow"
	if tau == 0 {
		tau, says = p.Typical.SE, "one as large as the error of one crystal"
	}
	if p.Wide == nil || p.Wide.Tau != tau {
		t.Fatalf("the plan for a spread of %g is missing", tau)
	}
	floatcmp.Check(t, "seen with three at more spread", p.Wide.Seen, pool.Visible(math.Sqrt((p.Typical.SE*p.Typical.SE+tau*tau)/3), 0.05, 0.8), 0, 1e-12)
	for i := range p.Needs {
		if p.Wide.Needs[i].Crystals < p.Needs[i].Crystals {
			t.Errorf("more spread needs fewer crystals: %+v, %+v", p.Wide.Needs[i], p.Needs[i])
		}
	}
	if !strings.Contains(p.Cautions[0], says) {
		t.Errorf("cautions %q", p.Cautions)
	}
}

// One crystal asks how many to measure: its error is that of half of the thin position, and
// the plan says that this is an assumption.
func TestPlanOfOneCrystalAssumes(t *testing.T) {
	s := studyOf(t, smallPlan(1), &Settings{Replicates: 20, Flips: 20})
	p, err := s.Plan(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	k := p.Measured[0]
	half := s.compared[s.list[0]].Result.Bracket.Thin
	if !k.Assumed || len(p.Measured) != 1 || !(p.Typical.SE > 0) {
		t.Fatalf("%+v", p)
	}
	floatcmp.Check(t, "SE", k.SE, (half.Hi-half.Lo)/2/1.959964, 0, 1e-6)
	if all := strings.Join(p.Cautions, " "); !strings.HasPrefix(all, "An assumption: in 1 of 1 crystal ") || !strings.Contains(all, "brackets tell no spread between crystals: the first table takes none") || p.Wide == nil {
		t.Errorf("%s", all)
	}
	if !math.IsInf(k.Seen, 1) || !math.IsInf(p.Seen, 1) || !math.IsInf(p.Curve[0].Seen, 1) || math.IsInf(p.Curve[1].Seen, 1) || p.Needs[len(p.Needs)-1].Crystals < 2 || !math.IsInf(p.Table[0].Pairs, 1) {
		t.Errorf("one crystal is said to see m: %+v", p)
	}
	if p, err = s.Plan(context.Background(), &PlanSettings{Spread: 0.02}); err != nil || p.Wide != nil || p.Tau != 0.02 {
		t.Errorf("with a spread: %+v, %v", p, err)
	}
	three, err := studyOf(t, smallPlan(3), &Settings{Replicates: 20, Flips: 20}).Plan(context.Background(), nil)
	if err != nil || three.assumed() != 0 || strings.Contains(strings.Join(three.Cautions, " "), "An assumption") {
		t.Errorf("three crystals: %+v, %v", three, err)
	}
}

func TestPlanRefuses(t *testing.T) {
	s := studyOf(t, smallPlan(1), &Settings{Replicates: 20, Flips: 20})
	for _, set := range []PlanSettings{{M: -0.1}, {M: 1}, {M: math.NaN()}, {Power: 0.4}, {Power: 1}, {Spread: -0.1}, {Spread: 1}} {
		if _, err := s.Plan(context.Background(), &set); err == nil || !strings.Contains(err.Error(), "must lie between") {
			t.Errorf("%+v: %v", set, err)
		}
	}
}

// Where equivalents and positions scatter by counting alone, counting noise is
// all there is; deviations take their share.
func TestNoiseShare(t *testing.T) {
	share := func(deviation float64) float64 {
		p := smallPlan(2)
		for i := range p.Crystals {
			for j := range p.Crystals[i].Positions {
				q := &p.Crystals[i].Positions[j]
				q.Deviation, q.Exchange, q.Curb, q.Offset = deviation, 0, 0, 0
			}
		}
		s := studyOf(t, p, &Settings{Replicates: 20, Flips: 20})
		x, err := s.Compare(context.Background(), s.Contrasts()[0])
		if err != nil {
			t.Fatal(err)
		}
		return noiseShare(x)
	}
	if none, some := share(0), share(0.3); none < 0.8 || some > 0.3 {
		t.Errorf("share of noise %.2f without deviations and %.2f with 30 %%", none, some)
	}
}

// From five crystals on their spread is estimated, and counts against the plan.
func TestPlanKnowsSpread(t *testing.T) {
	plan := smallPlan(5)
	plan.DMin = 2.2
	for i := range plan.Crystals {
		plan.Crystals[i].Positions[2].Exchange = []float64{0.02, 0.3, 0.05, 0.35, 0.1}[i]
	}
	s := studyOf(t, plan, &Settings{Replicates: 20, Flips: 20})
	p, err := s.Plan(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if p.TauWhy != "" || !(p.Tau > 0.02) || p.M != 0.03 || p.Power != 0.8 {
		t.Fatalf("spread %g %q, m %g, power %g", p.Tau, p.TauWhy, p.M, p.Power)
	}
	if p.Wide != nil || !(p.TauLo < p.Tau && p.Tau < p.TauHi) {
		t.Errorf("spread %g in %g to %g, %+v", p.Tau, p.TauLo, p.TauHi, p.Wide)
	}
	d := pool.Design{SE: p.Typical.SE, Pairs: p.Typical.Pairs, Multiplicity: p.Typical.Multiplicity, NoiseShare: p.Typical.NoiseShare}
	floatcmp.Check(t, "seen by one", p.Curve[0].Seen, pool.Visible(math.Hypot(d.SE, p.Tau), 0.05, 0.8), 0, 1e-12)
	if without, err := d.Crystals(0.03, 0.05, 0.8); err != nil || without >= p.Needs[2].Crystals {
		t.Errorf("%d crystals without the spread, %d with it, %v", without, p.Needs[2].Crystals, err)
	}
}
