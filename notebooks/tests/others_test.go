package tests

import (
	"context"
	"path/filepath"
	"strings"
	"testing"

	"thinward/analysis/simulate"
	"thinward/io/manifest"
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
	for _, name := range names(t) {
		if name == "04-evidence.ipynb" {
			continue // the report has all its views, and the controls take the time
		}
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
			if name == "05-thickness-and-crystals.ipynb" && !strings.Contains(got, "bracket") {
				t.Errorf("one crystal gives no bracket:\n%s", got)
			}
		})
	}
}
