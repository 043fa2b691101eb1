package tests

import (
	"context"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"thinward/analysis/simulate"
	"thinward/io/manifest"
	"thinward/notebooks/runner"
)

// TestOtherSeries runs the notebooks on a series at the lower end of what is
// allowed: one crystal with two positions, so that m is a bracket and nothing can
// be said of other crystals.
func TestOtherSeries(t *testing.T) {
	plan := simulate.Tarn()
	plan.Title, plan.DMin = "One wedge", 1.7
	plan.Crystals = plan.Crystals[:1]
	all := plan.Crystals[0].Positions
	plan.Crystals[0].Positions = []simulate.Position{all[0], all[len(all)-1]}
	dir := t.TempDir()
	if err := manifest.Invent(context.Background(), plan, dir); err != nil {
		t.Fatal(err)
	}
	const report = "report.ipynb"
	shown, ran := callsOf(open(t, report)), 0
	for _, name := range names(t) {
		if name != report && within(callsOf(open(t, name)), shown) {
			continue // the report shows all of it
		}
		ran++
		t.Run(strings.TrimSuffix(name, ".ipynb"), func(t *testing.T) {
			t.Parallel()
			set := map[string]string{"series": filepath.Join(dir, "series.toml")}
			if name != "01-intake.ipynb" {
				set["replicates"] = "60"
			}
			res, err := runOn(t, name, set)
			if err != nil {
				t.Fatal(err)
			}
			got := plain(res.Notebook)
			if !strings.Contains(got, "One wedge") || strings.Contains(got, "L2") {
				t.Error("the outputs are not of the series that was set")
			}
			if broken(got) {
				t.Errorf("a bare NaN, Inf or a broken format:\n%s", got)
			}
			if name == report && !strings.Contains(got, "bracket") {
				t.Errorf("one crystal gives no bracket:\n%s", got)
			}
		})
	}
	if ran < 3 {
		t.Errorf("only %d notebooks are run", ran)
	}
}

// sessionCall is a call of a method of the session, which cells name s.
var sessionCall = regexp.MustCompile(`\bs\.(\w+)\(`)

func callsOf(nb *runner.Notebook) map[string]bool {
	out := map[string]bool{}
	for _, c := range nb.Cells {
		if c.Type != "code" {
			continue
		}
		for _, m := range sessionCall.FindAllStringSubmatch(c.Source, -1) {
			out[m[1]] = true
		}
	}
	return out
}

func within(a, b map[string]bool) bool {
	for name := range a {
		if !b[name] {
			return false
		}
	}
	return true
}
