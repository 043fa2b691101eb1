package manifest

import (
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/analysis"
	"thinward/analysis/simulate"
)

const tarn = "../../fixtures/tarn"

// plain reads a file, unpacked: the packed bytes may change with the Go release.
func plain(t *testing.T, path string) []byte {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasSuffix(path, ".gz") {
		return data
	}
	z, err := gzip.NewReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	text, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// TestTarnIsWhatItsPlanMakes: the committed demonstration is the one its plan
// invents.
func TestTarnIsWhatItsPlanMakes(t *testing.T) {
	plan, err := ReadPlan(filepath.Join(tarn, "plan.toml"))
	if err != nil {
		t.Fatal(err)
	}
	for name, p := range map[string]*simulate.Plan{"plan.toml": plan, "simulate.Tarn": simulate.Tarn()} {
		dir := t.TempDir()
		if err := Invent(context.Background(), p, dir); err != nil {
			t.Fatal(err)
		}
		entries, err := os.ReadDir(dir)
		if err != nil {
			t.Fatal(err)
		}
		if len(entries) != 12 {
			t.Errorf("%s: %d files, want nine lists, series, plan and truth", name, len(entries))
		}
		total := int64(0)
		for _, e := range entries {
			info, err := e.Info()
			if err != nil {
				t.Fatal(err)
			}
			total += info.Size()
			if !bytes.Equal(plain(t, filepath.Join(dir, e.Name())), plain(t, filepath.Join(tarn, e.Name()))) {
				t.Errorf("%s: %s differs from the committed one; run thinward invent fixtures/tarn/plan.toml", name, e.Name())
			}
		}
		if total > 700<<10 {
			t.Errorf("the demonstration takes %d bytes, over 700 kB", total)
		}
	}
}

// TestTarnTruthIsRecovered: m inside its interval in each crystal, forbidden
// reflections up in the thick positions, and the naive axes leave the truth.
func TestTarnTruthIsRecovered(t *testing.T) {
	var truth Truth
	if err := json.Unmarshal(plain(t, filepath.Join(tarn, "truth.json")), &truth); err != nil {
		t.Fatal(err)
	}
	study, err := LoadWith(filepath.Join(tarn, "series.toml"), &analysis.Settings{Replicates: 200, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	forbidden, err := study.Forbidden(ctx)
	if err != nil {
		t.Fatal(err)
	}
	n := 0
	for _, c := range study.Contrasts() {
		if !c.Primary {
			continue
		}
		n++
		x, err := study.Compare(ctx, c)
		if err != nil {
			t.Fatal(err)
		}
		r := &x.Result
		want := math.NaN()
		for _, m := range truth.Contrasts {
			if m.Crystal == r.Crystal && m.Thin == r.Thin && m.Thick == r.Thick {
				want = m.M
			}
		}
		if r.StrengthAxis != "crystals" || !r.Matched {
			t.Errorf("%s: axis %s, matched %v", r.Crystal, r.StrengthAxis, r.Matched)
		}
		if !(r.Exchange.Lo <= want && want <= r.Exchange.Hi) {
			t.Errorf("%s: m = %.4f (%.4f to %.4f) misses the truth %.4f", r.Crystal, r.Exchange.M, r.Exchange.Lo, r.Exchange.Hi, want)
		}
		if !(r.Exchange.Hi-r.Exchange.Lo < 0.08) {
			t.Errorf("%s: the interval %.4f to %.4f says little", r.Crystal, r.Exchange.Lo, r.Exchange.Hi)
		}
		if !(r.Strength.P < 0.05) {
			t.Errorf("%s: p = %g for a curve that is not flat", r.Crystal, r.Strength.P)
		}
		thin, thick := allOf(forbidden, r.Crystal, r.Thin), allOf(forbidden, r.Crystal, r.Thick)
		if !(thick.Ratio-thin.Ratio > 2*math.Hypot(thick.SU, thin.SU)) {
			t.Errorf("%s: forbidden reflections go from %.4f +- %.4f to %.4f +- %.4f", r.Crystal, thin.Ratio, thin.SU, thick.Ratio, thick.SU)
		}
	}
	if n != 3 {
		t.Errorf("%d primary contrasts, want one a crystal", n)
	}
}

func allOf(list []analysis.Forbidden, crystal, position string) analysis.Forbidden {
	for _, f := range list {
		if f.Crystal == crystal && f.Position == position && f.Element == "all" {
			return f
		}
	}
	return analysis.Forbidden{Ratio: math.NaN()}
}

// TestRealPair runs on two published lists when they are at hand: what the tool
// must say of them is that strengths differ, that m is a bracket, that forbidden
// reflections are not recorded, and that nothing is attributed to thickness.
func TestRealPair(t *testing.T) {
	real := "../../../shared/real"
	if _, err := os.Stat(filepath.Join(real, "molecular-thin.cif")); err != nil {
		t.Skip("no real lists beside the checkout")
	}
	abs, err := filepath.Abs(real)
	if err != nil {
		t.Fatal(err)
	}
	text := `title = "Two crystals of one compound"
seed = 7
[[crystal]]
name = "A"
[[crystal.position]]
name = "thin"
thickness_nm = 45.3
files = ["` + abs + `/molecular-thin.cif"]
[[crystal]]
name = "B"
[[crystal.position]]
name = "thick"
thickness_nm = 138.4
files = ["` + abs + `/molecular-thick.cif"]
`
	if _, err := Load(folder(t, text, nil)); err == nil || !strings.Contains(err.Error(), "[[between]]") {
		t.Errorf("a contrast between crystals that nobody asked for: %v", err)
	}
	study, err := LoadWith(folder(t, text+"[[between]]\nthin = \"A/thin\"\nthick = \"B/thick\"\n", nil), &analysis.Settings{Replicates: 100, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	r, err := study.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if r.Inputs[0].Rows != 3570 || r.Inputs[0].Observations != 2294 || r.Inputs[1].Rows != 8013 || r.Inputs[1].Observations != 4391 {
		t.Errorf("rows and observations: %+v", r.Inputs)
	}
	c := r.Contrasts[0]
	if c.Matched || c.StrengthAxis != "bracket" || !math.IsNaN(c.Exchange.M) {
		t.Errorf("contrast: matched %v, axis %s, m %g", c.Matched, c.StrengthAxis, c.Exchange.M)
	}
	if !(c.Correlation.Hi < 1) || !(c.Bracket.Lo < c.Bracket.Thick.Value && c.Bracket.Thick.Value < c.Bracket.Thin.Value && c.Bracket.Thin.Value < c.Bracket.Hi) {
		t.Errorf("correlation %+v, bracket %+v", c.Correlation, c.Bracket)
	}
	if c.Pairs != 645 {
		t.Errorf("%d common reflections, counted by hand 645", c.Pairs)
	}
	all := ""
	for _, a := range r.Answers {
		all += a.Text + "\n"
	}
	for _, want := range []string{"bracket", "Not recorded", "nothing here attributes a difference to thickness"} {
		if !strings.Contains(all, want) {
			t.Errorf("the answers do not say %q:\n%s", want, all)
		}
	}
}
