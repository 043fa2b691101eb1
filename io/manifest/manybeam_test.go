package manifest

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/difference"
	"thinward/analysis/electron"
	"thinward/analysis/simulate"
	"thinward/analysis/size"
)

const manybeam = "../../fixtures/manybeam"

var regen = flag.Bool("regen", false, "calculate the many-beam series anew")

// TestManyBeamSeriesIsWhatItsPlanMakes takes a minute of many beams:
// THINWARD_FULL=1 compares, -regen writes the series anew.
func TestManyBeamSeriesIsWhatItsPlanMakes(t *testing.T) {
	if os.Getenv("THINWARD_FULL") == "" && !*regen {
		t.Skip("needs THINWARD_FULL=1")
	}
	plan, err := simulate.ManyBeam(context.Background(), simulate.Slate(), &electron.BeamSettings{})
	if err != nil {
		t.Fatal(err)
	}
	series, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	if *regen {
		dir = manybeam
	}
	if err := WriteInvented(series, plan, dir); err != nil {
		t.Fatal(err)
	}
	entries, err := os.ReadDir(manybeam)
	if err != nil {
		t.Fatal(err)
	}
	total := int64(0)
	for _, e := range entries {
		info, err := e.Info()
		if err != nil {
			t.Fatal(err)
		}
		total += info.Size()
		if !bytes.Equal(plain(t, filepath.Join(dir, e.Name())), plain(t, filepath.Join(manybeam, e.Name()))) {
			t.Errorf("%s differs from the committed one; run go test -run ManyBeamSeries ./io/manifest -regen", e.Name())
		}
	}
	if len(entries) != 12 || total > 250<<10 {
		t.Errorf("%d files of %d bytes, want 12 and under 250 kB", len(entries), total)
	}
}

// kinematicTwin is the series that the plan of the fixture makes without its law.
func kinematicTwin(t *testing.T) *simulate.Series {
	t.Helper()
	plan, err := ReadPlan(filepath.Join(manybeam, "plan.toml"))
	if err != nil {
		t.Fatal(err)
	}
	twin, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		t.Fatal(err)
	}
	return twin
}

// onTruth is m of a contrast with the kinematic strength as its axis, over the reflections
// that the axis of other crystals has too.
func onTruth(t *testing.T, x *analysis.Compared, in *analysis.Intake, twin *simulate.Series) float64 {
	t.Helper()
	j := map[crystal.HKL]float64{}
	for u, h := range twin.Truth.HKL {
		j[h] = twin.Truth.J[u]
	}
	z, sum, n := make([]float64, x.Pairs.Len()), make([]float64, x.Pairs.Shells), make([]float64, x.Pairs.Shells)
	for i, u := range x.Pairs.Unique {
		var ok bool
		if z[i], ok = j[in.Catalogue.HKL[u]]; !ok {
			t.Fatalf("%v is not in the truth", in.Catalogue.HKL[u])
		}
		if math.IsNaN(x.Input.Z[i]) {
			z[i] = math.NaN()
			continue
		}
		sum[x.Pairs.Shell[i]] += z[i]
		n[x.Pairs.Shell[i]]++
	}
	for i, s := range x.Pairs.Shell {
		z[i] *= n[s] / sum[s]
	}
	input := *x.Input
	input.Z = z
	m, err := size.Exchange(&input, nil)
	if err != nil {
		t.Fatal(err)
	}
	return m.M
}

func on(t *testing.T, r *analysis.ContrastResult, axis difference.Axis) analysis.AxisResult {
	t.Helper()
	for _, a := range r.Axes {
		if a.Axis == axis.String() {
			return a
		}
	}
	t.Fatalf("%s: no axis %s", r.Crystal, axis)
	return analysis.AxisResult{}
}

// TestManyBeamAxes: on intensities of many beams the axis of other crystals gives the m
// of the true axis, to 0.02 in every contrast of every crystal, and the third position of the same
// crystal gives less: its deviations are those of its neighbours. Equivalents
// that are averaged weaken that, and the bootstrap gives the distance in one crystal a
// standard error of 0.005 to 0.03, so the third position must miss by more than 0.02 in the
// mean over the crystals, and beyond its own interval in one of them.
func TestManyBeamAxes(t *testing.T) {
	ctx := context.Background()
	twin := kinematicTwin(t)
	study, err := LoadWith(filepath.Join(manybeam, "series.toml"), &analysis.Settings{Replicates: 100, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	in, err := study.Intake(ctx)
	if err != nil {
		t.Fatal(err)
	}
	var third, lead float64
	primaries, beyond := 0, 0
	for _, c := range study.Contrasts() {
		x, err := study.Compare(ctx, c)
		if err != nil {
			t.Fatal(err)
		}
		truth, others, same := onTruth(t, x, in, twin), on(t, &x.Result, difference.AxisCrystals).M.Value, on(t, &x.Result, difference.AxisThird).M.Value
		d := on(t, &x.Result, difference.AxisThird).Delta
		if c.Primary && d.Hi < 0 {
			beyond++
		}
		t.Logf("%s: m %.4f on the truth, %.4f on other crystals, %.4f on the third position, which differs by %.4f (%.4f to %.4f)", study.Name(c), truth, others, same, d.Value, d.Lo, d.Hi)
		if x.Result.StrengthAxis != difference.AxisCrystals.String() {
			t.Errorf("%s: axis %s leads", study.Name(c), x.Result.StrengthAxis)
		}
		if !(math.Abs(others-truth) < 0.02) {
			t.Errorf("%s: m = %.4f on the axis of other crystals, %.4f on the truth", study.Name(c), others, truth)
		}
		if !c.Primary {
			continue
		}
		primaries++
		lead += (others - truth) / 3
		third += (same - truth) / 3
		if !(truth > 0.05) || !(x.Result.Strength.P < 0.05) {
			t.Errorf("%s: m %.4f on the truth, p = %g: thickness does too little to try the pipeline on", study.Name(c), truth, x.Result.Strength.P)
		}
		if !(same < others) {
			t.Errorf("%s: the third position gives %.4f, not less than %.4f", study.Name(c), same, others)
		}
	}
	if primaries != 3 || !(math.Abs(lead) < 0.01) || !(third < -0.02) || beyond == 0 {
		t.Errorf("%d crystals; mean distance from the truth %.4f on other crystals, %.4f on the third position, beyond its interval in %d", primaries, lead, third, beyond)
	}
}

// TestManyBeamCentric tries the pipeline on a crystal with a centre of symmetry, where
// structure factors are real and the first deviation from kinematic intensities is
// of second order. It takes minutes: THINWARD_FULL=1.
func TestManyBeamCentric(t *testing.T) {
	if os.Getenv("THINWARD_FULL") == "" {
		t.Skip("needs THINWARD_FULL=1")
	}
	ctx := context.Background()
	law, err := simulate.ManyBeam(ctx, simulate.Shale(), &electron.BeamSettings{})
	if err != nil {
		t.Fatal(err)
	}
	twin := inventOf(t, law.Kinematic())
	for name, effect := range map[string]bool{"many beams": true, "kinematic twin": false} {
		series := twin
		if effect {
			series = inventOf(t, law)
		}
		dir := t.TempDir()
		if err := WriteInvented(series, &series.Plan, dir); err != nil {
			t.Fatal(err)
		}
		study, err := LoadWith(filepath.Join(dir, "series.toml"), &analysis.Settings{Replicates: 200, Flips: 200})
		if err != nil {
			t.Fatal(err)
		}
		in, err := study.Intake(ctx)
		if err != nil {
			t.Fatal(err)
		}
		var third, lead float64
		for _, c := range study.Contrasts() {
			if !c.Primary {
				continue
			}
			x, err := study.Compare(ctx, c)
			if err != nil {
				t.Fatal(err)
			}
			truth, others, same := onTruth(t, x, in, twin), on(t, &x.Result, difference.AxisCrystals).M.Value, on(t, &x.Result, difference.AxisThird).M.Value
			t.Logf("%s, %s: m %.4f on the truth, %.4f on other crystals, %.4f on the third position; p %.4f; (m,q,o) %.4f %.4f %.4f", name, study.Name(c), truth, others, same, x.Result.Strength.P, x.Result.Exchange.M, x.Result.Curb.Q, x.Result.Offset.O)
			lead += (others - truth) / 3
			third += (same - truth) / 3
			if !(math.Abs(others-truth) < 0.02) {
				t.Errorf("%s, %s: m = %.4f on the axis of other crystals, %.4f on the truth", name, study.Name(c), others, truth)
			}
			if (x.Result.Strength.P < 0.05) != effect || effect && !(truth > 0.05) {
				t.Errorf("%s, %s: m %.4f on the truth, p = %g", name, study.Name(c), truth, x.Result.Strength.P)
			}
		}
		if effect && !(third < lead-0.01) {
			t.Errorf("mean distance from the truth %.4f on other crystals, %.4f on the third position", lead, third)
		}
		verdict := analysis.VerdictNo
		if effect {
			verdict = analysis.VerdictYes
		}
		r := answered(t, study)
		for _, a := range r.Answers {
			t.Logf("%s: %s %s: %s %q", name, a.Question, a.Verdict, a.Text, a.Detail)
			if (a.Section == "sizes" || a.Section == "strength") && a.Verdict != verdict {
				t.Errorf("%s: %s %s", name, a.Question, a.Verdict)
			}
		}
	}
}

// card is what the report says to a question, with a line for every crystal below; growth has
// one more, of tilt within a position.
type card struct {
	question, verdict string
	says, never       []string
	lines             int
}

func checkCards(t *testing.T, r *analysis.Result, want []card) {
	t.Helper()
	for _, w := range want {
		i := slices.IndexFunc(r.Answers, func(a analysis.Answer) bool { return a.Question == w.question })
		if i < 0 {
			t.Errorf("no card asks %q", w.question)
			continue
		}
		a := &r.Answers[i]
		t.Logf("%s %s: %s %q", a.Question, a.Verdict, a.Text, a.Detail)
		if a.Verdict != w.verdict || len(a.Detail) != w.lines {
			t.Errorf("%s: %s with %d lines, want %s with %d: %s", w.question, a.Verdict, len(a.Detail), w.verdict, w.lines, a.Text)
		}
		for _, x := range w.says {
			if !strings.Contains(a.Text, x) {
				t.Errorf("%s: %q lacks %q", w.question, a.Text, x)
			}
		}
		for _, x := range w.never {
			if strings.Contains(a.Text, x) {
				t.Errorf("%s: %q says %q", w.question, a.Text, x)
			}
		}
	}
}

// errEnough ends a run after the crystals were joined: what follows changes only the
// card of cautions, and takes ten times as long. THINWARD_FULL=1 runs on.
var errEnough = errors.New("enough")

func answered(t *testing.T, study *analysis.Study) *analysis.Result {
	t.Helper()
	var last *analysis.Result
	_, err := study.Run(context.Background(), func(step string, r *analysis.Result) error {
		last = r
		if step == "crystals" && os.Getenv("THINWARD_FULL") == "" {
			return errEnough
		}
		return nil
	})
	if err != nil && !errors.Is(err, errEnough) {
		t.Fatal(err)
	}
	return last
}

// TestManyBeamConclusions: the report finds thickness dependence in strong and weak
// reflections and filled forbidden ones on many beams, in three crystals, and says what else
// could do it; on the kinematic twin of the same structure, orientations and noise it
// finds nothing, and says beside every nothing what it would have seen.
func TestManyBeamConclusions(t *testing.T) {
	twin := kinematicTwin(t)
	null := t.TempDir()
	if err := WriteInvented(twin, &twin.Plan, null); err != nil {
		t.Fatal(err)
	}
	const power = "would have been seen"
	for _, c := range []struct {
		dir    string
		effect bool
		cards  []card
	}{
		{manybeam, true, []card{
			{"Do the intensities differ at all?", analysis.VerdictYes, []string{"3 of 3 crystals", "Bending, mosaicity, dose"}, []string{power}, 3},
			{"Has intensity moved from strong to weak reflections?", analysis.VerdictYes,
				[]string{"of 3 crystals", "In these crystals together", "A curb q", "is no part of this m", "dynamical scattering makes both", "One slope"}, []string{power, "does not describe"}, 3},
			{"Does it depend on strength?", analysis.VerdictYes, []string{"not flat in 3 of 3 crystals", "the weakest gain with thickness in 3", "the strongest lose in 3"}, []string{power}, 3},
			{"Does it depend on resolution?", analysis.VerdictYes, []string{"look alike here"}, []string{power}, 3},
			// S1 and S2 have five and three of them, too few for their scatter.
			{"Are forbidden reflections filled?", analysis.VerdictYes, []string{"They rise with thickness in 1 of 3 crystals", "background left in the intensities", "wrong space group"}, []string{power}, 3},
			{"Does it grow with thickness?", analysis.VerdictYes, []string{"grows by", "over 3 crystals"}, []string{power}, 5},
		}},
		{null, false, []card{
			{"Do the intensities differ at all?", analysis.VerdictNo, []string{power, "80 % power"}, []string{"differ beyond"}, 3},
			{"Has intensity moved from strong to weak reflections?", analysis.VerdictNo, []string{"No exchange is seen", "An exchange of m = 0.0", power, "in the crystals together"}, []string{"curb", "does not describe"}, 3},
			{"Does it depend on strength?", analysis.VerdictNo, []string{"flat within its noise in 3 of 3 crystals", "is known to within"}, []string{"not flat"}, 3},
			{"Does it depend on resolution?", analysis.VerdictNo, []string{"No trend", power}, nil, 3},
			{"Are forbidden reflections filled?", analysis.VerdictNo, []string{"No rise with thickness", power}, nil, 3},
			{"Does it grow with thickness?", analysis.VerdictNo, []string{"No growth is seen", "per 100 nm " + power}, nil, 6},
		}},
	} {
		study, err := LoadWith(filepath.Join(c.dir, "series.toml"), &analysis.Settings{Replicates: 100, Flips: 200})
		if err != nil {
			t.Fatal(err)
		}
		r := answered(t, study)
		checkCards(t, r, c.cards)
		if these := r.Crystals.InThese; (these.Lo > 0) != c.effect || these.Hi < 0 {
			t.Errorf("effect %v: m in these crystals %.4f (%.4f to %.4f)", c.effect, these.Value, these.Lo, these.Hi)
		}
		for i := range r.Contrasts {
			x := &r.Contrasts[i]
			if !x.Primary {
				continue
			}
			if (x.Strength.P < 0.05) != c.effect {
				t.Errorf("effect %v: %s: p = %g for a flat curve", c.effect, x.Crystal, x.Strength.P)
			}
			if !(x.MinimumM > 0 && x.MinimumM < 0.15) || !c.effect && !(x.MinimumM < 0.02) {
				t.Errorf("effect %v: %s: smallest visible m %.4f", c.effect, x.Crystal, x.MinimumM)
			}
			one := math.NaN()
			for _, m := range x.Models {
				if m.Model == "instrument" {
					one = m.M.Value
				}
			}
			// The exact m of one slope on the true axis lies between 0.09 and 0.13 (TestManyBeamAxes).
			if c.effect && !(one > 0.05) || !c.effect && !(math.Abs(one) < 0.02) {
				t.Errorf("effect %v: %s: m = %.4f by one slope", c.effect, x.Crystal, one)
			}
		}
		for i := range r.Ledger {
			if e := &r.Ledger[i]; e.Verdict == analysis.VerdictFails {
				t.Errorf("effect %v: %s fails in %s: %s", c.effect, e.Check, e.Where, e.Why)
			}
		}
	}
}

// TestTruthOfALawIsNull: what a law of its own gives has no m, q and o, which is not the same
// as 0.
func TestTruthOfALawIsNull(t *testing.T) {
	var truth Truth
	if err := json.Unmarshal(plain(t, filepath.Join(manybeam, "truth.json")), &truth); err != nil {
		t.Fatal(err)
	}
	plan := simulate.Tarn()
	plan.DMin = 4
	plain := truthOf(inventOf(t, plan))
	plan.Law = func(int, int, crystal.HKL) (float64, bool) { return 1, true }
	for name, v := range map[string]*Truth{"the series": &truth, "another law": truthOf(inventOf(t, plan))} {
		if len(v.Positions) != 9 || len(v.Contrasts) != 0 || v.Note == "" {
			t.Errorf("%s: %d positions, %d contrasts, note %q", name, len(v.Positions), len(v.Contrasts), v.Note)
		}
		for _, p := range v.Positions {
			if p.M != nil || p.Q != nil || p.O != nil || p.Deviation != nil {
				t.Errorf("%s: %+v", name, p)
			}
		}
	}
	if len(plain.Contrasts) == 0 || plain.Note != "" {
		t.Errorf("%d contrasts, note %q", len(plain.Contrasts), plain.Note)
	}
	for _, p := range plain.Positions {
		if p.M == nil || p.Q == nil || p.O == nil || p.Deviation == nil {
			t.Errorf("%+v", p)
		}
	}
}

func inventOf(t *testing.T, p *simulate.Plan) *simulate.Series {
	t.Helper()
	s, err := simulate.Invent(context.Background(), p)
	if err != nil {
		t.Fatal(err)
	}
	return s
}
