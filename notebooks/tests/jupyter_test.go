package tests

import (
	"bytes"
	"context"
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/notebooks/kernel"
	"thinward/notebooks/runner"
)

// jupyterHome is a temporary home for Jupyter with our kernel registered, and the
// environment that points there.
func jupyterHome(t *testing.T) (home string, env []string) {
	t.Helper()
	home = t.TempDir()
	data := filepath.Join(home, "data")
	if _, err := kernel.Install(context.Background(), kernelPath, &kernel.InstallSettings{DataDir: data}); err != nil {
		t.Fatal(err)
	}
	env = append(os.Environ(), "HOME="+home, "JUPYTER_DATA_DIR="+data, "JUPYTER_CONFIG_DIR="+filepath.Join(home, "config"), "JUPYTER_RUNTIME_DIR="+filepath.Join(home, "run"))
	return home, env
}

// placed writes a committed notebook into a folder, with the coarse series and
// few draws as its parameters.
func placed(t *testing.T, name, dir string) string {
	t.Helper()
	nb := open(t, name)
	for _, c := range nb.Cells {
		if c.HasTag("parameters") {
			c.Source = strings.Replace(c.Source, `"fixtures/tarn/series.toml"`, strconv.Quote(coarse), 1)
			c.Source = strings.Replace(c.Source, "replicates := 2000", "replicates := "+fewDraws, 1)
		}
	}
	data, err := nb.Bytes()
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(dir, name)
	if err := os.WriteFile(path, data, 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestJupyterNbconvert runs a notebook under nbconvert with the registered
// kernel, with and without GOROOT in the environment, and compares its outputs with
// the golden text of the headless run.
func TestJupyterNbconvert(t *testing.T) {
	nbconvert, err := exec.LookPath("jupyter-nbconvert")
	if err != nil {
		missing(t, "jupyter-nbconvert", err)
	}
	goroot, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		t.Fatal(err)
	}
	want, err := os.ReadFile(filepath.Join("testdata", "03-differences.txt"))
	if err != nil {
		t.Fatal(err)
	}
	home, env := jupyterHome(t)
	path := placed(t, "03-differences.ipynb", home)
	for _, extra := range []string{"GOROOT=", "GOROOT=" + strings.TrimSpace(string(goroot))} {
		out := filepath.Join(home, "out.ipynb")
		os.Remove(out)
		cmd := exec.Command(nbconvert, "--to", "notebook", "--execute", "--output", out, path)
		cmd.Dir, cmd.Env = home, append(env, extra)
		if text, err := cmd.CombinedOutput(); err != nil {
			t.Fatalf("%s: %v\n%s", extra, err, text)
		}
		nb, err := runner.ReadNotebook(out)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(strings.Split(string(want), "\n"), strings.Split(plain(nb), "\n")); diff != "" {
			t.Errorf("%s: outputs differ from the headless run (-want +got):\n%s", extra, diff)
		}
		if n := figures(nb); n < 4 {
			t.Errorf("%s: %d cells with a figure, want at least 4", extra, n)
		}
	}
}

// figures counts the cells with an SVG figure among their outputs.
func figures(nb *runner.Notebook) int {
	n := 0
	for _, c := range nb.Cells {
		for i := range c.Outputs {
			if svg := c.Outputs[i].TextOf("image/svg+xml"); strings.HasPrefix(svg, "<svg") {
				n++
				break
			}
			var lines []string
			if json.Unmarshal(c.Outputs[i].Data["image/svg+xml"], &lines) == nil && len(lines) > 0 && bytes.HasPrefix([]byte(lines[0]), []byte("<svg")) {
				n++
				break
			}
		}
	}
	return n
}
