package kernel

import (
	"context"
	"errors"
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

// Install copies the kernel binary into the user's Jupyter data folder and
// writes the kernel spec beside it, replacing an earlier one.
func Install(ctx context.Context, binary string, s *InstallSettings) (*Installed, error) {
	return nil, errors.New("kernel: cannot install in this commit")
}

// Uninstall removes what Install wrote and gives the folder it removed; empty if
// there was none.
func Uninstall(s *InstallSettings) (dir string, err error) {
	return "", errors.New("kernel: cannot uninstall in this commit")
}
