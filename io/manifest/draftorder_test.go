package manifest

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func TestDraftOrder(t *testing.T) {
	for _, c := range []struct {
		given, want []string
		thickness   []float64
		sorted      bool
	}{
		{[]string{"L1-mid", "L1-thick", "L1-thin", "L2-thick", "L2-thin"}, []string{"L1-thin", "L1-mid", "L1-thick", "L2-thin", "L2-thick"}, nil, true},
		{[]string{"Thick_2", "x", "Thin_2"}, []string{"Thin_2", "Thick_2", "x"}, nil, true},
		{[]string{"b", "a", "thing"}, []string{"b", "a", "thing"}, nil, false},
		{[]string{"b", "a"}, []string{"a", "b"}, []float64{200, 90}, true},
		{[]string{"b", "a"}, []string{"b", "a"}, []float64{200, 0}, false},
	} {
		d := &drafter{}
		for k, name := range c.given {
			p := draftPosition{name: name}
			if c.thickness != nil {
				p.thickness = c.thickness[k]
			}
			d.positions = append(d.positions, p)
		}
		d.order()
		var got []string
		for _, p := range d.positions {
			got = append(got, p.name)
		}
		if diff := cmp.Diff(c.want, got); diff != "" || d.sorted != c.sorted {
			t.Errorf("%v: sorted %t: %s", c.given, d.sorted, diff)
		}
	}
}

// Files in the order of a glob, thick before thin.
func TestDraftOfFilesInGlobOrder(t *testing.T) {
	dir := t.TempDir()
	var paths []string
	for _, name := range []string{"L1-thick", "L1-thin", "a", "b"} {
		path := filepath.Join(dir, name+".cif")
		if err := os.WriteFile(path, []byte(cifOf("10 12 15 90 90 90", "P 21 21 21")), 0o644); err != nil {
			t.Fatal(err)
		}
		paths = append(paths, path)
	}
	text, err := Draft(paths[:2])
	if err != nil {
		t.Fatal(err)
	}
	if s := string(text); strings.Index(s, "\"L1-thin\"") > strings.Index(s, "\"L1-thick\"") || strings.Contains(s, "nothing says which") {
		t.Errorf("%s", s)
	}
	if text, err = Draft(paths[2:]); err != nil || !strings.Contains(string(text), "nothing says which is thinner") {
		t.Errorf("%v: %s", err, text)
	}
}
