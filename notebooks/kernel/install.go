package kernel

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
)

// SpecName is the name of the kernel among Jupyter's kernels, and DisplayName
// the one people see.
const (
	SpecName    = "thinward"
	DisplayName = "Go (Thinward)"
)

// InstallSettings say where the kernel is registered. Nil means all defaults.
type InstallSettings struct {
	// DataDir is Jupyter's data folder of the user. Default: JUPYTER_DATA_DIR,
	// else jupyter in XDG_DATA_HOME, else the platform's: ~/.local/share/jupyter,
	// ~/Library/Jupyter or %APPDATA%\jupyter.
	DataDir string
}

// Installed says what Install wrote.
type Installed struct {
	Dir    string // the folder of the kernel spec
	Spec   string // kernel.json in it
	Binary string // the copy of the kernel in it
}

// spec is Jupyter's kernel.json.
type spec struct {
	Argv          []string          `json:"argv"`
	DisplayName   string            `json:"display_name"`
	Language      string            `json:"language"`
	InterruptMode string            `json:"interrupt_mode"`
	Metadata      map[string]string `json:"metadata"`
}

// madeBy marks our kernel.json, so that Uninstall removes nobody else's.
const madeBy = "thinward kernel --install"

// Install copies the kernel binary into the user's Jupyter data folder and
// writes the kernel spec beside it, replacing an earlier one. A kernel that runs
// from there goes on running. Errors name the file; an existing spec of the same
// name that Install did not write is an error.
func Install(ctx context.Context, binary string, s *InstallSettings) (*Installed, error) {
	dir, err := specDir(s)
	if err != nil {
		return nil, err
	}
	if _, err := ours(dir); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, err
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, fmt.Errorf("kernel: install: %w", err)
	}
	in := &Installed{Dir: dir, Spec: filepath.Join(dir, "kernel.json"), Binary: filepath.Join(dir, "thinward-kernel"+exeSuffix())}
	if err := copyBeside(ctx, in.Binary, binary); err != nil {
		return nil, fmt.Errorf("kernel: install: %w", err)
	}
	text, err := json.MarshalIndent(spec{
		Argv:          []string{in.Binary, "{connection_file}"},
		DisplayName:   DisplayName,
		Language:      "go",
		InterruptMode: "message",
		Metadata:      map[string]string{"made_by": madeBy},
	}, "", "  ")
	if err != nil {
		return nil, fmt.Errorf("kernel: install: %w", err)
	}
	fresh := in.Spec + ".new"
	if err := os.WriteFile(fresh, append(text, '\n'), 0o644); err != nil {
		return nil, fmt.Errorf("kernel: install: %w", err)
	}
	if err := os.Rename(fresh, in.Spec); err != nil {
		return nil, fmt.Errorf("kernel: install: %w", err)
	}
	return in, nil
}

// Uninstall removes what Install wrote and gives the folder it removed; empty if
// there was none.
func Uninstall(s *InstallSettings) (dir string, err error) {
	dir, err = specDir(s)
	if err != nil {
		return "", err
	}
	in, err := ours(dir)
	if errors.Is(err, fs.ErrNotExist) {
		return "", nil
	}
	if err != nil {
		return "", err
	}
	for _, path := range []string{in.Binary, in.Binary + ".old", in.Spec} {
		if err := os.Remove(path); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return "", fmt.Errorf("kernel: uninstall: %w", err)
		}
	}
	if err := os.Remove(dir); err != nil {
		return "", fmt.Errorf("kernel: uninstall: %w", err)
	}
	return dir, nil
}

// Find gives what Install wrote, or an error that is fs.ErrNotExist if there is
// nothing.
func Find(s *InstallSettings) (*Installed, error) {
	dir, err := specDir(s)
	if err != nil {
		return nil, err
	}
	return ours(dir)
}

// ours reads the spec in dir. A spec that others wrote is an error.
func ours(dir string) (*Installed, error) {
	path := filepath.Join(dir, "kernel.json")
	text, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	var sp spec
	if err := json.Unmarshal(text, &sp); err != nil || sp.Metadata["made_by"] != madeBy || len(sp.Argv) == 0 {
		return nil, fmt.Errorf("kernel: %s was not written by us; move it away first", path)
	}
	return &Installed{Dir: dir, Spec: path, Binary: sp.Argv[0]}, nil
}

func specDir(s *InstallSettings) (string, error) {
	if s == nil {
		s = &InstallSettings{}
	}
	dir := s.DataDir
	if dir == "" {
		var err error
		if dir, err = jupyterData(runtime.GOOS, os.Getenv, os.UserHomeDir); err != nil {
			return "", fmt.Errorf("kernel: Jupyter's data folder: %w", err)
		}
	}
	dir, err := filepath.Abs(dir)
	if err != nil {
		return "", fmt.Errorf("kernel: Jupyter's data folder: %w", err)
	}
	return filepath.Join(dir, "kernels", SpecName), nil
}

// jupyterData is the rule of Jupyter's own documentation of its common
// directories.
func jupyterData(system string, env func(string) string, home func() (string, error)) (string, error) {
	if dir := env("JUPYTER_DATA_DIR"); dir != "" {
		return dir, nil
	}
	h, err := home()
	if err != nil {
		return "", err
	}
	switch system {
	case "darwin":
		return filepath.Join(h, "Library", "Jupyter"), nil
	case "windows":
		if dir := env("APPDATA"); dir != "" {
			return filepath.Join(dir, "jupyter"), nil
		}
		return filepath.Join(h, ".jupyter", "data"), nil
	}
	if dir := env("XDG_DATA_HOME"); dir != "" {
		return filepath.Join(dir, "jupyter"), nil
	}
	return filepath.Join(h, ".local", "share", "jupyter"), nil
}

// copyBeside copies from to a new file beside to and then moves it there. Where
// a running binary cannot be replaced it is moved away first.
func copyBeside(ctx context.Context, to, from string) error {
	in, err := os.Open(from)
	if err != nil {
		return err
	}
	defer in.Close()
	fresh := to + ".new"
	out, err := os.OpenFile(fresh, os.O_CREATE|os.O_TRUNC|os.O_WRONLY, 0o755)
	if err != nil {
		return err
	}
	_, err = io.Copy(out, in)
	if closed := out.Close(); err == nil {
		err = closed
	}
	if err == nil {
		err = ctx.Err()
	}
	if err != nil {
		_ = os.Remove(fresh)
		return err
	}
	if runtime.GOOS == "windows" {
		_ = os.Remove(to + ".old")
		_ = os.Rename(to, to+".old")
	}
	return os.Rename(fresh, to)
}
