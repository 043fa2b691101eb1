package kernel

import (
	"context"
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

const jupyterNotebook = `{"cells": [
 {"cell_type": "code", "execution_count": null, "metadata": {}, "outputs": [], "source": ["import (\n", "\"fmt\"\n", "\"thinward/notebooks/session\"\n", ")\n", "fmt.Println(\"häß\")"]},
 {"cell_type": "code", "execution_count": null, "metadata": {}, "outputs": [], "source": ["x := session.Progress{Done: 41}\n", "x.Done + 1"]}
], "metadata": {"kernelspec": {"display_name": "Go (Thinward)", "language": "go", "name": "thinward"}}, "nbformat": 4, "nbformat_minor": 4}`

// TestUnderJupyter runs a notebook with the registered kernel under nbconvert, with
// GOROOT in the environment: what it shows, how it fails, how it is interrupted.
func TestUnderJupyter(t *testing.T) {
	nbconvert, err := exec.LookPath("jupyter-nbconvert")
	if err != nil {
		t.Skip("jupyter-nbconvert is not installed: ", err)
	}
	binary, err := Ensure(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	home := t.TempDir()
	data := filepath.Join(home, "data")
	if _, err := Install(context.Background(), binary, &InstallSettings{DataDir: data}); err != nil {
		t.Fatal(err)
	}
	goroot, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		t.Fatal(err)
	}
	write(t, filepath.Join(home, "in.ipynb"), jupyterNotebook)
	write(t, filepath.Join(home, "fails.ipynb"), strings.Replace(jupyterNotebook, "x.Done + 1", "panic(\\\"stop here\\\")", 1))
	run := func(extra string, args ...string) (string, error) {
		cmd := exec.Command(nbconvert, append([]string{"--to", "notebook", "--execute"}, args...)...)
		cmd.Dir = home
		cmd.Env = append(os.Environ(), "HOME="+home, "JUPYTER_DATA_DIR="+data, "JUPYTER_CONFIG_DIR="+filepath.Join(home, "config"), "JUPYTER_RUNTIME_DIR="+filepath.Join(home, "run"), extra)
		out, err := cmd.CombinedOutput()
		return string(out), err
	}
	// The notebooks of the project are run without GOROOT too.
	for _, extra := range []string{"GOROOT=" + strings.TrimSpace(string(goroot))} {
		if out, err := run(extra, "--output", "out.ipynb", "in.ipynb"); err != nil {
			t.Fatalf("%s: %v\n%s", extra, err, out)
		}
		text, err := os.ReadFile(filepath.Join(home, "out.ipynb"))
		if err != nil {
			t.Fatal(err)
		}
		var nb struct {
			Cells []struct {
				Outputs []struct {
					Text any
					Data map[string]any
				}
			}
		}
		if err := json.Unmarshal(text, &nb); err != nil {
			t.Fatal(err)
		}
		if len(nb.Cells) != 2 || len(nb.Cells[0].Outputs) == 0 || len(nb.Cells[1].Outputs) != 1 {
			t.Fatalf("%s: written\n%s", extra, text)
		}
		if got, _ := json.Marshal(nb.Cells[0].Outputs[0].Text); string(got) != `["häß\n"]` {
			t.Errorf("%s: printed %s", extra, got)
		}
		if got, _ := json.Marshal(nb.Cells[1].Outputs[0].Data["text/plain"]); string(got) != `["42"]` {
			t.Errorf("%s: shown %s", extra, got)
		}
	}
	out, err := run("GOROOT=", "--output", "out2.ipynb", "fails.ipynb")
	if err == nil || !strings.Contains(out, "stop here") {
		t.Errorf("a failing cell: %v\n%s", err, out)
	}
	// Jupyter interrupts by a message, since the kernel spec says so.
	write(t, filepath.Join(home, "loops.ipynb"), strings.Replace(jupyterNotebook, "fmt.Println(", "for {}\\n\", \"fmt.Println(", 1))
	out, err = run("GOROOT=", "--output", "out3.ipynb", "--allow-errors", "--ExecutePreprocessor.timeout=2", "--ExecutePreprocessor.interrupt_on_timeout=True", "loops.ipynb")
	if err != nil {
		t.Fatalf("an interrupted cell: %v\n%s", err, out)
	}
	text, err := os.ReadFile(filepath.Join(home, "out3.ipynb"))
	if err != nil || !strings.Contains(string(text), "\"ename\": \"Interrupted\"") || !strings.Contains(string(text), "\"42\"") {
		t.Errorf("an interrupted cell: %v\n%s", err, text)
	}
}
