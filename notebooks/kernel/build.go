package kernel

import (
	"context"
	"errors"
)

// PrebuiltEnv names the environment variable that, when not empty, holds the path
// of a kernel binary to use instead of building one.
const PrebuiltEnv = "THINWARD_KERNEL"

// Settings say where the kernel is built from and to. Nil means all defaults.
type Settings struct {
	// Root is the folder of our go.mod. Default: the folder this package was
	// compiled from, else the module around the working directory.
	Root string
	// CacheDir holds the binaries and the edited copies. Default: the folder
	// thinward in os.UserCacheDir.
	CacheDir string
	// Go is the Go tool. Default: go on PATH, else the one in GOROOT.
	Go string
	// Progress, when not nil, is called from one goroutine as the build goes on.
	// It is not called when the binary exists already.
	Progress func(Progress)
}

// Progress is the state of a build.
type Progress struct {
	Done    int    // packages built
	Total   int    // packages needed; 0 while not known
	Package string // the last one built; empty while sources are looked for and while linking
}

// BuildError is a kernel that could not be built.
type BuildError struct {
	Step   string // what failed: "go tool", "module", "sources", "edit NAME", "build", "cache"
	Err    error
	Output string // the last lines the Go tool printed, if it ran
	Remedy string
}

// Error gives step, cause, output and remedy.
func (e *BuildError) Error() string {
	s := "kernel: " + e.Step + ": " + e.Err.Error()
	if e.Output != "" {
		s += "\n" + e.Output
	}
	if e.Remedy != "" {
		s += "\n" + e.Remedy
	}
	return s
}

// Unwrap gives the cause.
func (e *BuildError) Unwrap() error { return e.Err }

// Ensure gives the path of a kernel binary that fits our sources, building it
// when it is not in the cache. The key of the binary is the SHA-256 of all that
// goes into it, so nothing is built twice; a lock file keeps concurrent builds
// of several processes apart. If the environment variable THINWARD_KERNEL is
// set, the file it names is returned as it is. Errors are *BuildError, or
// ctx.Err() when cancelled.
func Ensure(ctx context.Context, s *Settings) (path string, err error) {
	return "", errors.New("kernel: not built in this commit")
}
