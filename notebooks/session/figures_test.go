package session

import (
	"encoding/json"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
	"thinward/analysis/crystal"
)

// made is a result from fixed formulas: two crystals, three positions, a pattern
// in the primary contrasts.
func made() *analysis.Result {
	nan := math.NaN()
	r := &analysis.Result{Series: "made"}
	for _, name := range []string{"L1", "L2"} {
		for j, p := range []string{"thin", "mid", "thick"} {
			nm := 140 + 80*float64(j)
			r.Intake = append(r.Intake, analysis.IntakeResult{Crystal: name, Position: p, ThicknessNM: nm})
			r.Scaling = append(r.Scaling, analysis.ScalingResult{Crystal: name, Position: p, CurveDeg: []float64{-50, 0, 50}, CurveLnK: []float64{0.1, 0, -0.1 * float64(j)}})
			for _, kind := range []string{"acentric", "centric"} {
				r.Distributions = append(r.Distributions, analysis.Distribution{Crystal: name, Position: p, Kind: kind, N: 400, Z: []float64{0.1, 0.5, 1}, Below: []float64{0.1 - 0.03*float64(j), 0.39, 0.63}, BelowTheory: []float64{0.1, 0.39, 0.63}})
			}
			r.Forbidden = append(r.Forbidden, analysis.Forbidden{Crystal: name, Position: p, Element: "all", N: 12, Ratio: 0.02 + 0.04*float64(j), SU: 0.01})
		}
		for _, pair := range [][2]string{{"thin", "thick"}, {"thin", "mid"}} {
			c := analysis.ContrastResult{Crystal: name, Thin: pair[0], Thick: pair[1], Primary: pair[1] == "thick", Pairs: 100, StrengthAxis: "crystals"}
			for i := 0; i < 30; i++ {
				x := 0.1 + 0.13*float64(i)
				c.Strength.Grid, c.Strength.Mean = append(c.Strength.Grid, x), append(c.Strength.Mean, 0.1*(x-1))
				c.Strength.Lo, c.Strength.Hi = append(c.Strength.Lo, 0.1*(x-1)-0.02), append(c.Strength.Hi, 0.1*(x-1)+0.02)
				c.Strength.LoSim, c.Strength.HiSim = append(c.Strength.LoSim, 0.1*(x-1)-0.03), append(c.Strength.HiSim, 0.1*(x-1)+0.03)
			}
			c.Strength.PStrength = 0.0005
			c.Resolution = analysis.Resolution{D: []float64{3, 2, 1.5}, LogRatio: []float64{0.1, 0, -0.1}, Lo: []float64{0, -0.1, -0.2}, Hi: []float64{0.2, 0.1, 0}, Remainder: []float64{0.01, 0, -0.01}, DeltaB: -0.3}
			c.Naive = map[string]analysis.Naive{"thin": {Score: 20, GhostScore: 8, Grid: []float64{0.1, 1, 4}, Mean: []float64{-0.1, 0, 0.2}, Ghost: []float64{-0.08, 0, 0.01}}}
			c.Exchange = analysis.Exchange{M: 0.1, Lo: 0.07, Hi: 0.13}
			c.Curb, c.ThicknessNM = analysis.Curb{Q: 0.02, Lo: 0.01, Hi: 0.03}, [2]float64{140, 300}
			r.Contrasts = append(r.Contrasts, c)
		}
		r.Specification = append(r.Specification, analysis.Specification{Crystal: name, Choice: "leading", Level: "crystals", M: analysis.Interval{Value: 0.1, Lo: 0.07, Hi: 0.13}, Leading: true},
			analysis.Specification{Crystal: name, Choice: "axis", Level: "third", M: analysis.Interval{Value: nan, Lo: nan, Hi: nan, Why: "no third"}})
		r.Controls = append(r.Controls, analysis.ControlResult{Control: "swapped", Crystal: name, M: analysis.Interval{Value: -0.1, Lo: -0.13, Hi: -0.07}, Expected: -0.1})
	}
	r.Crystals = &analysis.CrystalsResult{N: 2, InThese: analysis.Interval{Value: 0.1, Lo: 0.08, Hi: 0.12}, LikeThese: analysis.Interval{Value: 0.1, Lo: math.Inf(-1), Hi: math.Inf(1)}}
	r.Thickness = &analysis.ThicknessResult{Lines: []analysis.ThicknessLine{{Crystal: "L1", T: []float64{140, 300, 220}, Mu: []float64{0, 0.1, 0.05}, MuSE: []float64{0, 0.02, 0.01}}}}
	r.Expectation = &analysis.Expectation{Budget: []analysis.Budget{{ThicknessNM: 300, Unscattered: 0.3, Kinematic: 0.2, Multiple: 0.1, Inelastic: 0.4}, {ThicknessNM: 100, Unscattered: 0.7, Kinematic: 0.15, Multiple: 0.05, Inelastic: 0.1}},
		TwoBeam: analysis.TwoBeamCurve{ExtinctionNM: 600, DA: 2.5, ThicknessNM: [2]float64{140, 300}, Strength: []float64{0.1, 1, 4, 9, 20}}}
	return r
}

func madePairs(n int) []analysis.PairRow {
	var out []analysis.PairRow
	for i := 0; i < n; i++ {
		u := math.Mod(float64(i)*0.6180339887, 1)
		out = append(out, analysis.PairRow{Crystal: "L1", Thin: "thin", Thick: "thick", HKL: crystal.HKL{H: i % 7, K: i % 5, L: i}, D: 2, Strength: -math.Log(u + 1e-6), Eps: u - 0.5, Z: 10 * (u - 0.5), JThin: 1, JThick: 1})
	}
	out = append(out, analysis.PairRow{Crystal: "L1", Thin: "thin", Thick: "thick", Strength: math.NaN(), Eps: 1})
	return out
}

// views are all figures of a result.
func views(r *analysis.Result, pairs []analysis.PairRow) map[string]*View {
	return map[string]*View{
		"strength": byStrength(r), "naive": naive(r), "resolution": byResolution(r), "pairs": pairsView(r, pairs), "scale": scaleCurves(r), "sizes": sizesFigure(r, "by default"),
		"thickness": thicknessFigure(r), "specification": specificationFigure(r), "controls": controlsFigure(r), "forbidden": forbiddenFigure(r), "budget": budgetFigure(r), "curb": curbFigure(r), "distributions": distributionsFigure(r),
	}
}

func TestFiguresOfAResult(t *testing.T) {
	for name, v := range views(made(), madePairs(300)) {
		if v.Title == "" || v.SVG == "" || v.Plain == "" {
			t.Errorf("%s: title %q, %d bytes of SVG, %d of text", name, v.Title, len(v.SVG), len(v.Plain))
		}
		if n := strings.Count(v.String(), "\n"); n > plainLines {
			t.Errorf("%s: %d lines of text", name, n)
		}
		if len(v.HTML) > 1_000_000 {
			t.Errorf("%s: %d bytes", name, len(v.HTML))
		}
		for _, want := range []string{"<figcaption>", "<details class=\"numbers\">", "<svg"} {
			if !strings.Contains(v.HTML, want) {
				t.Errorf("%s has no %s", name, want)
			}
		}
		if err := balanced(v.HTML); err != nil {
			t.Errorf("%s: %v", name, err)
		}
		if strings.Contains(v.HTML, "NaN") || strings.Contains(v.Plain, "NaN") {
			t.Errorf("%s shows NaN", name)
		}
	}
}

// balanced reads the HTML as a tree: every element that is opened is closed.
func balanced(text string) error {
	d := xml.NewDecoder(strings.NewReader("<r>" + text + "</r>"))
	d.Strict, d.AutoClose, d.Entity = false, xml.HTMLAutoClose, xml.HTMLEntity
	var open []string
	for {
		tok, err := d.RawToken()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return err
		}
		switch e := tok.(type) {
		case xml.StartElement:
			if e.Name.Local != "input" {
				open = append(open, e.Name.Local)
			}
		case xml.EndElement:
			if len(open) == 0 || open[len(open)-1] != e.Name.Local {
				return errors.New("</" + e.Name.Local + "> closes " + strings.Join(open, " "))
			}
			open = open[:len(open)-1]
		}
	}
	if len(open) > 0 {
		return errors.New("left open: " + strings.Join(open, " "))
	}
	return nil
}

// An empty result, or one whose numbers are all missing, gives words and no panic.
func TestFiguresOfNothing(t *testing.T) {
	for name, v := range views(&analysis.Result{}, nil) {
		if v.SVG != "" || v.Plain == "" || !strings.Contains(v.HTML, `class="empty"`) {
			t.Errorf("%s of nothing: %q", name, v.Plain)
		}
	}
	r := made()
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		c.Strength, c.Resolution = analysis.Curve{P: math.NaN(), Why: "too few pairs"}, analysis.Resolution{DeltaB: math.NaN()}
		c.Naive, c.Exchange = nil, analysis.Exchange{M: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1)}
	}
	r.Scaling, r.Forbidden, r.Thickness, r.Expectation = nil, nil, nil, nil
	for name, v := range views(r, nil) {
		if v.Plain == "" || v.HTML == "" {
			t.Errorf("%s: nothing is said", name)
		}
	}
	if text := byStrength(r).HTML; !strings.Contains(text, "too few pairs") || !strings.Contains(text, "nothing to draw") {
		t.Error("an empty curve does not say why")
	}
}

// A curb of 0.02 leaves 0.98 of strength 1 and 0.92 of strength 4, and two beams what Blackman's
// integral says.
func TestCurbBesideTwoBeams(t *testing.T) {
	r := made()
	v := curbFigure(r)
	if n := strings.Count(v.HTML, "<svg"); n != 2 {
		t.Errorf("%d panels, not 2", n)
	}
	for _, want := range []string{"0.980", "0.920", "0.010 to 0.030", "no meaning of its own", "L1", "L2"} {
		if !strings.Contains(v.HTML+v.Plain, want) {
			t.Errorf("%q is not said", want)
		}
	}
	// At strength 1 and a thickness of 600/pi nm A is 1, where Blackman's ratio is 0.712885146599
	// (worked with mpmath); that of the thin position tends to 1.
	c := &analysis.ContrastResult{ThicknessNM: [2]float64{1e-6, 600 / math.Pi}}
	if d := cmp.Diff(0.712885146599, twoBeamRatio(c, r.Expectation, 1), cmpopts.EquateApprox(0, 1e-9)); d != "" {
		t.Errorf("two beams leave %s", d)
	}
	r.Expectation.TwoBeam.ExtinctionNM = math.NaN()
	if v := curbFigure(r); v.SVG != "" || !strings.Contains(v.Plain, "energy") {
		t.Errorf("without an energy: %q", v.Plain)
	}
}

// A crystal whose points fall gets a second, dashed line; one whose points rise does not.
func TestThicknessShowsWhatNeverFalls(t *testing.T) {
	r := made()
	r.Thickness.Lines = []analysis.ThicknessLine{{Crystal: "L1", T: []float64{140, 220, 300}, Mu: []float64{0, 0.1, 0.05}, MuSE: []float64{0, 0.02, 0.02}, Rising: []float64{0, 0.075, 0.075}},
		{Crystal: "L2", T: []float64{140, 220, 300}, Mu: []float64{0, 0.05, 0.1}, MuSE: []float64{0, 0.02, 0.02}, Rising: []float64{0, 0.05, 0.1}}}
	v := thicknessFigure(r)
	if !strings.Contains(v.HTML, "L1, nearest that never falls") || strings.Contains(v.HTML, "L2, nearest") || strings.Count(v.Plain, "0.075") != 2 {
		t.Error(v.Plain)
	}
}

func TestPrimaryComesFirst(t *testing.T) {
	r := made()
	r.Contrasts[0], r.Contrasts[1] = r.Contrasts[1], r.Contrasts[0]
	sets := pairings(r)
	if len(sets) != 2 || sets[0].name != "thin \u2212 thick (primary)" || len(sets[0].list) != 2 || sets[1].name != "thin \u2212 mid" {
		t.Errorf("sets %+v", sets)
	}
	v := byStrength(r)
	if n := strings.Count(v.HTML, `type="radio"`); n != 2 {
		t.Errorf("%d alternatives, not 2", n)
	}
	if n := strings.Count(v.HTML, "<svg"); n != 4 {
		t.Errorf("%d panels, not 4", n)
	}
}

func TestManyPairsStaySmall(t *testing.T) {
	v := pairsView(made(), madePairs(20000))
	if len(v.HTML) > 400_000 {
		t.Errorf("%d bytes", len(v.HTML))
	}
	_, rest, ok := strings.Cut(v.HTML, `class="brush-data">`)
	data, _, _ := strings.Cut(rest, "</script>")
	var rows [][]float64
	if err := json.Unmarshal([]byte(data), &rows); !ok || err != nil || len(rows) != brushable {
		t.Fatalf("%d pairs to list, %v", len(rows), err)
	}
	for i := 1; i < len(rows); i++ {
		if math.Abs(rows[i][8]) > math.Abs(rows[i-1][8]) {
			t.Fatalf("pair %d changed more than the one before", i)
		}
	}
	if !strings.Contains(v.HTML, "Shades of the hexagons") {
		t.Error("the shades are not explained")
	}
}

func TestSpacings(t *testing.T) {
	var got []string
	for _, m := range spacings([]float64{1 / (3.3 * 3.3), 1 / (1.15 * 1.15)}) {
		got = append(got, m.Label)
	}
	if strings.Join(got, " ") != "3 2 1.5 1.2" {
		t.Errorf("marks at %q", got)
	}
	if spacings(nil) != nil || spacings([]float64{math.NaN(), 1}) != nil {
		t.Error("marks without a range")
	}
}

// The growth stands once for each crystal and element, beside the thickest position; made up
// in steps of 0.04 per 80 nm.
func TestForbiddenTableGivesTheGrowth(t *testing.T) {
	v := forbiddenTable(made())
	if n := strings.Count(v.Plain, "0.0500"); n != 2 {
		t.Errorf("the growth of 0.05 per 100 nm stands %d times in\n%s", n, v.Plain)
	}
	for _, line := range strings.Split(v.Plain, "\n") {
		if strings.Contains(line, "0.0500") != strings.Contains(line, "/thick") {
			t.Errorf("the growth is beside the wrong position: %s", line)
		}
	}
}
