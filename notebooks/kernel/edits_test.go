package kernel

import (
	"errors"
	"strings"
	"testing"
)

func TestEditsMatchExactlyOnce(t *testing.T) {
	all := []edit{{"first", "a.go", "old()", "new()"}, {"other", "b.go", "zzz", ""}}
	got, err := applyEdits("a.go", "x; old(); y", all)
	if err != nil || got != "x; new(); y" {
		t.Errorf("%q, %v", got, err)
	}
	for _, text := range []string{"x", "old(); old()"} {
		_, err := applyEdits("a.go", text, all)
		var failed *BuildError
		if !errors.As(err, &failed) || failed.Step != `edit "first"` || !strings.Contains(err.Error(), "not 1") {
			t.Errorf("%q: %v", text, err)
		}
	}
	if got, err := applyEdits("c.go", "old(); old()", all); err != nil || got != "old(); old()" {
		t.Errorf("a file without edits: %q, %v", got, err)
	}
	if err := checkEdits([]string{"a.go"}, all); err == nil || !strings.Contains(err.Error(), `edit "other"`) {
		t.Errorf("a missing file: %v", err)
	}
	if err := checkEdits([]string{"a.go", "b.go"}, all); err != nil {
		t.Error(err)
	}
}

func TestEditsHaveNames(t *testing.T) {
	seen := map[string]bool{}
	for _, e := range edits {
		if e.name == "" || seen[e.name] || e.old == e.new || strings.Contains(e.old, "\n") {
			t.Errorf("edit %+v", e)
		}
		seen[e.name] = true
		if leftOut[e.file] {
			t.Errorf("edit %q is of a file that is left out", e.name)
		}
	}
}
