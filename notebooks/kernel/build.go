package kernel

import (
	"context"
	"errors"
	"os"
	"path/filepath"
	"runtime"
	"time"

	"github.com/rogpeppe/go-internal/lockedfile"
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
	// Progress, when not nil, is called from one goroutine at a time as the build
	// goes on. It is not called when the binary exists already.
	Progress func(Progress)
}

// Progress is the state of a build.
type Progress struct {
	Done    int    // packages built
	Total   int    // packages that have to be built; 0 while not known
	Package string // the last one built; empty at the start and while linking
}

// BuildError is a kernel that could not be built.
type BuildError struct {
	Step   string // what failed: "go tool", "module", "sources", `edit "NAME"`, "build", "cache"
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
// ctx.Err() when cancelled. s may be nil and is not changed.
func Ensure(ctx context.Context, s *Settings) (path string, err error) {
	if path := os.Getenv(PrebuiltEnv); path != "" {
		return prebuilt(path)
	}
	b, err := newBuilder(ctx, s)
	if err != nil {
		return "", err
	}
	in, err := b.inputs(ctx)
	if err != nil {
		return "", err
	}
	if path := b.binary(in.key); isFresh(path) {
		return path, nil
	}
	unlock, err := b.lock(ctx)
	if err != nil {
		return "", err
	}
	defer unlock()
	return b.ensureLocked(ctx, in)
}

// ensureLocked builds until the sources are the same before and after: somebody
// may be editing them, and a binary must not lie under another's key.
func (b *builder) ensureLocked(ctx context.Context, in *inputs) (string, error) {
	for range buildTries {
		path := b.binary(in.key)
		if isFresh(path) {
			return path, nil
		}
		fresh, remove, err := b.compile(ctx, in, path)
		if err != nil {
			return "", err
		}
		after, err := b.inputs(ctx)
		if err == nil && after.key == in.key {
			err = os.Rename(fresh, path)
			remove()
			if err != nil {
				return "", cacheError(err)
			}
			b.prune(path)
			return path, nil
		}
		remove()
		if err != nil {
			return "", err
		}
		in = after
	}
	return "", &BuildError{Step: "build", Err: errors.New("the sources changed during every build"), Remedy: "Try again when they are at rest."}
}

// buildTries is the number of builds that a change of the sources may spoil.
const buildTries = 3

func prebuilt(path string) (string, error) {
	path, err := filepath.Abs(path)
	if err == nil {
		_, err = os.Stat(path)
	}
	if err != nil {
		return "", &BuildError{Step: "prebuilt", Err: err, Remedy: "The environment variable " + PrebuiltEnv + " must name a kernel binary, or be unset."}
	}
	return path, nil
}

// isFresh tells whether the binary is there, and marks it as used.
func isFresh(path string) bool {
	if _, err := os.Stat(path); err != nil {
		return false
	}
	now := time.Now()
	_ = os.Chtimes(path, now, now)
	return true
}

type builder struct {
	root, cache, goTool string
	progress            func(Progress)
}

func newBuilder(ctx context.Context, s *Settings) (*builder, error) {
	if s == nil {
		s = &Settings{}
	}
	b := &builder{root: s.Root, cache: s.CacheDir, goTool: s.Go, progress: s.Progress}
	if b.progress == nil {
		b.progress = func(Progress) {}
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	var err error
	if b.goTool == "" {
		if b.goTool, err = findGo(); err != nil {
			return nil, err
		}
	}
	if b.root == "" {
		if b.root, err = findRoot(); err != nil {
			return nil, err
		}
	}
	if b.cache == "" {
		dir, err := os.UserCacheDir()
		if err != nil {
			return nil, &BuildError{Step: "cache", Err: err, Remedy: "Set HOME or XDG_CACHE_HOME to a folder that can be written to."}
		}
		b.cache = filepath.Join(dir, "thinward")
	}
	if b.cache, err = filepath.Abs(b.cache); err != nil {
		return nil, &BuildError{Step: "cache", Err: err}
	}
	return b, nil
}

func (b *builder) binary(key string) string {
	return filepath.Join(b.cache, "kernel-"+key+exeSuffix())
}

func exeSuffix() string {
	if runtime.GOOS == "windows" {
		return ".exe"
	}
	return ""
}

func (b *builder) lock(ctx context.Context) (unlock func(), err error) {
	if err := os.MkdirAll(b.cache, 0o755); err != nil {
		return nil, cacheError(err)
	}
	type held struct {
		unlock func()
		err    error
	}
	got := make(chan held, 1)
	go func() {
		u, err := lockedfile.MutexAt(filepath.Join(b.cache, "lock")).Lock()
		got <- held{u, err}
	}()
	select {
	case h := <-got:
		if h.err != nil {
			return nil, cacheError(h.err)
		}
		return h.unlock, nil
	case <-ctx.Done():
		// The lock may still come; it must not stay.
		go func() {
			if h := <-got; h.err == nil {
				h.unlock()
			}
		}()
		return nil, ctx.Err()
	}
}

func cacheError(err error) error {
	return &BuildError{Step: "cache", Err: err, Remedy: "The cache folder must be writable; XDG_CACHE_HOME moves it."}
}

// kept is the number of binaries that stay in the cache: each is about 45 MB.
const kept = 3

// prune removes the binaries that were used longest ago. What cannot be removed
// stays: somebody else may be running it.
func (b *builder) prune(current string) {
	all, err := filepath.Glob(filepath.Join(b.cache, "kernel-*"))
	if err != nil {
		return
	}
	for len(all) > kept {
		oldest, at := -1, time.Time{}
		for i, path := range all {
			info, err := os.Stat(path)
			if err != nil || path == current {
				continue
			}
			if oldest < 0 || info.ModTime().Before(at) {
				oldest, at = i, info.ModTime()
			}
		}
		if oldest < 0 {
			return
		}
		_ = os.Remove(all[oldest])
		all = append(all[:oldest], all[oldest+1:]...)
	}
}

var errNoModule = errors.New("the sources of Thinward were not found")
