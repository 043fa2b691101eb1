package manifest

import (
	"fmt"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/simulate"
)

// What two groups differ in, by the conditions of International Tables A, chapter 2.3.
func TestCompareGroups(t *testing.T) {
	for _, c := range []struct {
		file, series string
		grave        bool
		want         string // "" for the same, else what is said
	}{
		{"P 21 21 21", "P 21 21 21", false, ""},
		{"P 2", "P 1 2 1", false, ""},
		{"P 1 21 1", "P 1 21/m 1", false, "forbid the same reflections"},
		{"P 1 21/c 1", "P 1 21/n 1", true, "they forbid different reflections, such as 1 0 1 by P 1 21/c 1 only and 1 0 0 by P 1 21/n 1 only"},
		{"P 1 21 1", "P 1 1 21", true, "1 2/m 1 against 1 1 2/m"},
		{"P 3 2 1", "P 3 1 2", true, "-3m1 against -31m"},
		{"P 21 21 2", "P 21 21 21", true, "such as 0 0 1 by P 21 21 21 only"},
		{"P 21 21 21", "P 21 21 2", true, "such as 0 0 1 by P 21 21 21 only"},
		{"P 41 21 2", "P 43 21 2", false, ""},
		{"P 4", "P 4 2 2", true, "4/m against 4/mmm"},
		{"R 3 :H", "P 3", true, "such as"},
		{"P n m a", "P b n m", true, "different reflections, such as"},
	} {
		a, err := crystal.Lookup(c.file)
		if err != nil {
			t.Fatal(err)
		}
		b, err := crystal.Lookup(c.series)
		if err != nil {
			t.Fatal(err)
		}
		text, grave := compareGroups(a, b)
		if grave != c.grave || (text == "") != (c.want == "") || !strings.Contains(text, c.want) {
			t.Errorf("%s against %s: %t, %s; want %t, %s", c.file, c.series, grave, text, c.grave, c.want)
		}
	}
}

// Files that differ are refused where nothing else gives the group, and named once where
// the manifest does.
func TestGroupsOfFiles(t *testing.T) {
	base := strings.NewReplacer("thin.txt", "thin.cif", "thick.txt", "thick.cif", "[cell]\na = 10.0\nb = 12.0\nc = 15.0\n", "", "space_group = \"P 21 21 21\"\n", "",
		"[columns]\norder = [\"h\", \"k\", \"l\", \"intensity\", \"sigma\", \"phi\", \"frame\"]\n", "").Replace(good)
	cell := "10 12 15 90 90 90"
	for _, c := range []struct {
		thin, thick, manifest string
		fault                 string
		warnings              []string
	}{
		{"P 1 21/c 1", "P 1 21/n 1", "", "thick.cif gives space group P 1 21/n 1, the files before it P 1 21/c 1", nil},
		{"P 21 21 2", "P 21 21 21", "", "they forbid different reflections", nil},
		{"P 2 2 2", "P m m m", "", "", []string{"thick.cif"}},
		{"P 21 21 2", "P 21 21 2", "P 21 21 21", "", []string{"thin.cif, thick.cif"}},
		{"P 21 21 2", "P 1 21 1", "P 21 21 21", "", []string{"thin.cif", "thick.cif"}},
		{"P 21 21 21", "P 21 21 21", "P 21 21 21", "", nil},
	} {
		text := base
		if c.manifest != "" {
			text = fmt.Sprintf("space_group = %q\n%s", c.manifest, base)
		}
		s, err := ReadSeries(folder(t, text, map[string]string{"thin.cif": cifOf(cell, c.thin), "thick.cif": cifOf(cell, c.thick)}))
		name := c.thin + ", " + c.thick + ", " + c.manifest
		if c.fault != "" {
			if err == nil || !strings.Contains(err.Error(), c.fault) || !strings.Contains(err.Error(), "fix the group for all files") {
				t.Errorf("%s: error %v, want %q", name, err, c.fault)
			}
			continue
		}
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		var where []string
		for _, w := range s.Warnings {
			if w.Code == "group-differs" {
				where = append(where, w.Where)
			}
		}
		if strings.Join(where, "; ") != strings.Join(c.warnings, "; ") {
			t.Errorf("%s: warned of %q, want %q: %+v", name, where, c.warnings, s.Warnings)
		}
	}
}

func TestFileNames(t *testing.T) {
	if got := fileNames([]string{"a", "b", "c", "d", "e"}); got != "a, b and 3 other files" {
		t.Error(got)
	}
}

// An invented series is written under the group that it is said to have.
func TestInventWritesTheDeclaredGroup(t *testing.T) {
	path := small(t, func(p *simulate.Plan) {
		*p = *simulate.Flawed(simulate.FlawLaueHigh, 5)
		p.DMin, p.Crystals = 1.9, p.Crystals[:1]
	})
	s, err := ReadSeries(path)
	if err != nil {
		t.Fatal(err)
	}
	if s.Group.HM() != "P 21 21 21" || len(s.Warnings) > 0 {
		t.Errorf("group %s, warnings %+v", s.Group.HM(), s.Warnings)
	}
}
