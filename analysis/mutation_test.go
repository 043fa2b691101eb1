package analysis_test

import (
	"encoding/json"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// mutation is a fault put into the source on purpose. Each of killedBy, tests of
// package pkg, must fail under it, by an assertion: what does not compile, panics or
// runs out of time proves nothing.
type mutation struct {
	name     string
	file     string
	old, new string // old must stand in file exactly once
	pkg      string
	killedBy []string
	sampled  bool // runs without being asked for
}

// TestMutations holds the suite to what it is for. The table says which test notices
// which fault; a text that is no longer there fails by name, so that no row rots in
// silence. Without THINWARD_FULL=1 only the texts are looked at and the sampled rows
// run. THINWARD_MUTATE is a regular expression of the rows to run, all tests of
// their package instead of those named, for finding out what notices a new one.
func TestMutations(t *testing.T) {
	goTool, err := exec.LookPath("go")
	if err != nil {
		t.Skip("no go tool to compile with")
	}
	explore := os.Getenv("THINWARD_MUTATE")
	root := module(t)
	names := map[string]bool{}
	for _, m := range slices.Concat(axisMutations, scalingMutations, resampleMutations, sizeMutations, rowMutations) {
		if names[m.name] || len(m.killedBy) == 0 && explore == "" {
			t.Errorf("%s: given twice, or no test is named", m.name)
		}
		names[m.name] = true
		mutant := m.apply(t, root)
		chosen := m.sampled || os.Getenv("THINWARD_FULL") == "1"
		if explore != "" {
			chosen = regexp.MustCompile(explore).MatchString(m.name)
		}
		if mutant == "" || !chosen {
			continue
		}
		t.Run(m.name, func(t *testing.T) {
			t.Parallel()
			m.run(t, goTool, root, mutant, explore != "")
		})
	}
}

// apply returns the source of the mutant, "" when it cannot be made.
func (m *mutation) apply(t *testing.T, root string) string {
	src, err := os.ReadFile(filepath.Join(root, filepath.FromSlash(m.file)))
	if err != nil {
		t.Errorf("%s: %v", m.name, err)
		return ""
	}
	if n := strings.Count(string(src), m.old); n != 1 {
		t.Errorf("%s: the text to change stands %d times in %s, not once: %q", m.name, n, m.file, m.old)
		return ""
	}
	return strings.Replace(string(src), m.old, m.new, 1)
}

var failed = regexp.MustCompile(`(?m)^--- FAIL: (\w+)`)

func (m *mutation) run(t *testing.T, goTool, root, mutant string, explore bool) {
	dir := t.TempDir()
	changed := filepath.Join(dir, "mutant.go")
	if err := os.WriteFile(changed, []byte(mutant), 0o600); err != nil {
		t.Fatal(err)
	}
	overlay := filepath.Join(dir, "overlay.json")
	text, err := json.Marshal(map[string]map[string]string{"Replace": {filepath.Join(root, filepath.FromSlash(m.file)): changed}})
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(overlay, text, 0o600); err != nil {
		t.Fatal(err)
	}
	command := func(args ...string) (string, error) {
		c := exec.CommandContext(t.Context(), goTool, args...)
		c.Dir = root
		for _, e := range os.Environ() {
			if !strings.HasPrefix(e, "THINWARD_") {
				c.Env = append(c.Env, e)
			}
		}
		out, err := c.CombinedOutput()
		return string(out), err
	}
	if out, err := command("build", "-overlay", overlay, "./"+filepath.ToSlash(filepath.Dir(m.file))); err != nil {
		t.Fatalf("the mutant does not compile, which proves nothing:\n%s", out)
	}
	which := "^(" + strings.Join(m.killedBy, "|") + ")$"
	if explore {
		which = "^Test"
	}
	out, err := command("test", "-overlay", overlay, "-count=1", "-run", which, "./"+m.pkg)
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) {
		t.Fatal(err)
	}
	var red []string
	for _, f := range failed.FindAllStringSubmatch(out, -1) {
		red = append(red, f[1])
	}
	if explore {
		t.Logf("killed by %q", red)
		if len(red) > 0 {
			return
		}
	}
	if strings.Contains(out, "panic:") || strings.Contains(out, "[build failed]") || strings.Contains(out, "[setup failed]") {
		t.Fatalf("the tests broke off instead of failing:\n%s", out)
	}
	for _, name := range m.killedBy {
		if !slices.Contains(red, name) {
			t.Errorf("%s does not notice:\n%s", name, out)
		}
	}
	if explore && len(red) == 0 {
		t.Errorf("no test of %s notices:\n%s", m.pkg, out)
	}
}
