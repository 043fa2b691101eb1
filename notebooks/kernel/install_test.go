package kernel

import (
	"context"
	"encoding/json"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"testing"
)

func TestInstallAndUninstall(t *testing.T) {
	data := t.TempDir()
	s := &InstallSettings{DataDir: data}
	if _, err := Find(s); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("found before: %v", err)
	}
	if dir, err := Uninstall(s); dir != "" || err != nil {
		t.Errorf("uninstalled nothing: %q, %v", dir, err)
	}
	binary := filepath.Join(t.TempDir(), "kernel")
	for _, content := range []string{"one", "two"} {
		write(t, binary, content)
		in, err := Install(context.Background(), binary, s)
		if err != nil {
			t.Fatal(err)
		}
		if in.Dir != filepath.Join(data, "kernels", "thinward") {
			t.Errorf("folder %s", in.Dir)
		}
		if got, err := os.ReadFile(in.Binary); err != nil || string(got) != content {
			t.Errorf("binary %q, %v", got, err)
		}
		if info, err := os.Stat(in.Binary); err != nil || info.Mode().Perm()&0o100 == 0 {
			t.Errorf("binary cannot be run: %v", err)
		}
		var sp map[string]any
		text, err := os.ReadFile(in.Spec)
		if err != nil || json.Unmarshal(text, &sp) != nil {
			t.Fatal(err)
		}
		argv, _ := sp["argv"].([]any)
		if sp["display_name"] != "Go (Thinward)" || sp["interrupt_mode"] != "message" || sp["language"] != "go" || len(argv) != 2 || argv[0] != in.Binary || argv[1] != "{connection_file}" {
			t.Errorf("spec %s", text)
		}
	}
	dir, err := Uninstall(s)
	if err != nil || dir != filepath.Join(data, "kernels", "thinward") {
		t.Errorf("uninstalled %q, %v", dir, err)
	}
	if _, err := os.Stat(dir); !os.IsNotExist(err) {
		t.Errorf("left behind: %v", err)
	}
}

func TestOthersSpecIsLeftAlone(t *testing.T) {
	data := t.TempDir()
	spec := filepath.Join(data, "kernels", "thinward", "kernel.json")
	write(t, spec, `{"argv": ["other"], "display_name": "Other"}`)
	s := &InstallSettings{DataDir: data}
	if _, err := Install(context.Background(), spec, s); err == nil {
		t.Error("installed over it")
	}
	if _, err := Uninstall(s); err == nil {
		t.Error("removed it")
	}
	if _, err := os.Stat(spec); err != nil {
		t.Error(err)
	}
}

// The places are those of Jupyter's documentation, "Common Directories and File
// Locations".
func TestJupyterData(t *testing.T) {
	for _, c := range []struct {
		system string
		env    map[string]string
		want   string
	}{
		{"linux", nil, "/h/.local/share/jupyter"},
		{"linux", map[string]string{"XDG_DATA_HOME": "/x"}, "/x/jupyter"},
		{"linux", map[string]string{"XDG_DATA_HOME": "/x", "JUPYTER_DATA_DIR": "/j"}, "/j"},
		{"darwin", map[string]string{"XDG_DATA_HOME": "/x"}, "/h/Library/Jupyter"},
		{"windows", map[string]string{"APPDATA": "/a"}, "/a/jupyter"},
		{"windows", nil, "/h/.jupyter/data"},
	} {
		got, err := jupyterData(c.system, func(k string) string { return c.env[k] }, func() (string, error) { return "/h", nil })
		if err != nil || filepath.ToSlash(got) != c.want {
			t.Errorf("%s %v: %s, %v; want %s", c.system, c.env, got, err, c.want)
		}
	}
}
