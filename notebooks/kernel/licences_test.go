package kernel

import (
	"os"
	"os/exec"
	"path/filepath"
	"sort"
	"strings"
	"testing"
)

// TestLicencesAreListed: every module that the command or the kernel links
// stands in the README's list of licences, and none that is not linked.
func TestLicencesAreListed(t *testing.T) {
	root, err := filepath.Abs(filepath.Join("..", ".."))
	if err != nil {
		t.Fatal(err)
	}
	linked := map[string]bool{}
	for _, args := range [][]string{
		{"./notebooks/thinward"},
		{"github.com/gopherdata/gophernotes"},
		{"-tags", "kernel", "./notebooks/bindings/..."},
	} {
		cmd := exec.Command("go", append([]string{"list", "-deps", "-f", "{{with .Module}}{{.Path}}{{end}}"}, args...)...)
		cmd.Dir = root
		out, err := cmd.Output()
		if err != nil {
			t.Fatalf("go list %v: %v", args, err)
		}
		for _, path := range strings.Fields(string(out)) {
			if path != "thinward" {
				linked[path] = true
			}
		}
	}
	if len(linked) < 15 {
		t.Fatalf("only %d modules are linked: the listing is broken", len(linked))
	}
	readme, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	_, section, ok := strings.Cut(string(readme), "## What it is built on")
	if !ok {
		t.Fatal("the README has no list of licences")
	}
	listed := map[string]bool{}
	for _, word := range strings.FieldsFunc(section, func(r rune) bool { return strings.ContainsRune(" ,|()\n", r) }) {
		if host, rest, ok := strings.Cut(word, "/"); ok && strings.Contains(host, ".") && rest != "" {
			listed[word] = true
		}
	}
	var missing, extra []string
	for path := range linked {
		if !listed[path] {
			missing = append(missing, path)
		}
	}
	for path := range listed {
		if !linked[path] {
			extra = append(extra, path)
		}
	}
	sort.Strings(missing)
	sort.Strings(extra)
	if len(missing)+len(extra) > 0 {
		t.Errorf("not in the README: %v; in the README and not linked: %v", missing, extra)
	}
}
