package tests

import (
	"context"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"thinward/notebooks/runner"
)

var update = flag.Bool("update", false, "write the golden texts anew")

// fewDraws keeps the run short; what depends on the draws is in the golden text
// with that many.
const fewDraws = "200"

// runOn runs a committed notebook from the root of the project.
func runOn(t *testing.T, name string, set map[string]string) (*runner.Result, error) {
	t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Minute)
	defer cancel()
	return runner.Run(ctx, open(t, name), &runner.Options{KernelPath: kernelPath, WorkDir: root, Set: set, Timeout: 3 * time.Minute})
}

// TestGolden runs every notebook headless and offline, the report on the
// demonstration and the others on its coarse form, and compares the plain text of
// their outputs.
func TestGolden(t *testing.T) {
	for _, name := range names(t) {
		t.Run(strings.TrimSuffix(name, ".ipynb"), func(t *testing.T) {
			t.Parallel()
			set := map[string]string{}
			if name != "01-intake.ipynb" {
				set["replicates"] = fewDraws
			}
			if name != "report.ipynb" {
				set["series"] = coarse
			}
			begin := time.Now()
			res, err := runOn(t, name, set)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("%d cells in %.1f s", res.Ran, time.Since(begin).Seconds())
			got := plain(res.Notebook)
			if broken(got) {
				t.Errorf("the text holds a bare NaN, Inf or a broken format:\n%s", got)
			}
			path := filepath.Join("testdata", strings.TrimSuffix(name, ".ipynb")+".txt")
			if *update {
				if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
					t.Fatal(err)
				}
				return
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatalf("%v: make it with go test ./notebooks/tests -run Golden -update", err)
			}
			if diff := cmp.Diff(strings.Split(string(want), "\n"), strings.Split(got, "\n")); diff != "" {
				t.Errorf("outputs differ from %s (-want +got):\n%s", path, diff)
			}
		})
	}
}

// broken finds numbers and formats that no reader should see.
func broken(text string) bool {
	return strings.Contains(text, "NaN") || strings.Contains(text, "Inf") || strings.Contains(text, "%!")
}

// build is what says which build ran: it differs from one commit to the next.
var build = regexp.MustCompile(`Thinward [^;]+; go[^.]+\.[^.]+\S* \S+\.`)

// plain gives the plain text of every output, below the id of its cell.
func plain(nb *runner.Notebook) string {
	var b strings.Builder
	for _, c := range nb.Cells {
		if c.Type != "code" || len(c.Outputs) == 0 {
			continue
		}
		b.WriteString("== " + c.ID + "\n")
		for i := range c.Outputs {
			b.WriteString(strings.TrimRight(c.Outputs[i].PlainText(), "\n") + "\n")
		}
	}
	return build.ReplaceAllString(b.String(), "Thinward (version); (go).")
}
