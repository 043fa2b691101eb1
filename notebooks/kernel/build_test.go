package kernel

import (
	"context"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"thinward/notebooks/bindings"
)

// noPrebuilt makes sure that Ensure looks for sources.
func noPrebuilt(t *testing.T) { t.Setenv(PrebuiltEnv, "") }

func TestEnsureBuildsOnce(t *testing.T) {
	noPrebuilt(t)
	ctx := context.Background()
	first, err := Ensure(ctx, nil)
	if err != nil {
		t.Fatal(err)
	}
	called := false
	begin := time.Now()
	second, err := Ensure(ctx, &Settings{Progress: func(Progress) { called = true }})
	if err != nil || first != second || called {
		t.Errorf("second call: %q, %q, %v, progress %v", first, second, err, called)
	}
	t.Logf("found again in %v", time.Since(begin))
	out, err := exec.Command(second, "-packages").Output()
	if err != nil || !strings.Contains(string(out), "thinward/notebooks/session\n") || !strings.Contains(string(out), "display\n") {
		t.Errorf("packages: %v\n%s", err, out)
	}
}

// TestConcurrentBuilds has two callers ask for a kernel that is in no cache. The
// parts of it are in the build cache, so this is mostly linking.
func TestConcurrentBuilds(t *testing.T) {
	noPrebuilt(t)
	cache := t.TempDir()
	var mu sync.Mutex
	var finished []Progress
	var wg sync.WaitGroup
	paths := make([]string, 2)
	for i := range paths {
		wg.Add(1)
		go func() {
			defer wg.Done()
			var last Progress
			path, err := Ensure(context.Background(), &Settings{CacheDir: cache, Progress: func(p Progress) {
				// A build that starts anew, because the sources changed, begins at nothing.
				if p.Done < last.Done && p.Total > 0 || p.Done > p.Total {
					t.Errorf("progress %+v after %+v", p, last)
				}
				last = p
			}})
			if err != nil {
				t.Error(err)
			}
			paths[i] = path
			if last != (Progress{}) {
				mu.Lock()
				finished = append(finished, last)
				mu.Unlock()
			}
		}()
	}
	wg.Wait()
	if paths[0] != paths[1] || !strings.HasPrefix(paths[0], cache) {
		t.Errorf("paths %q", paths)
	}
	if len(finished) != 1 || finished[0].Total == 0 || finished[0].Done != finished[0].Total {
		t.Errorf("builds that ran: %+v", finished)
	}
	left, err := filepath.Glob(filepath.Join(cache, "build-*"))
	if err != nil || len(left) > 0 {
		t.Errorf("left behind: %q, %v", left, err)
	}
}

func TestPrebuilt(t *testing.T) {
	path := filepath.Join(t.TempDir(), "kernel")
	t.Setenv(PrebuiltEnv, path)
	if _, err := Ensure(context.Background(), nil); err == nil || !strings.Contains(err.Error(), PrebuiltEnv) {
		t.Errorf("a missing file: %v", err)
	}
	if err := os.WriteFile(path, nil, 0o700); err != nil {
		t.Fatal(err)
	}
	if got, err := Ensure(context.Background(), nil); err != nil || got != path {
		t.Errorf("%q, %v", got, err)
	}
}

// smallModule is a module of our name with the same requirements and little
// code, so that a test can change its sources.
func smallModule(t *testing.T, mainText string) string {
	t.Helper()
	root := t.TempDir()
	for _, name := range []string{"go.mod", "go.sum"} {
		text, err := os.ReadFile(filepath.Join("..", "..", name))
		if err != nil {
			t.Fatal(err)
		}
		write(t, filepath.Join(root, name), string(text))
	}
	write(t, filepath.Join(root, "notebooks", "kernel", "main", "main.go"), mainText)
	write(t, filepath.Join(root, "part", "part.go"), "package part\n\nconst Part = 1\n")
	return root
}

func write(t *testing.T, path, text string) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

const smallMain = "//go:build kernel\n\npackage main\n\nimport _ \"thinward/part\"\n\nfunc main() {}\n"

func TestKeyFollowsTheInputs(t *testing.T) {
	root := smallModule(t, smallMain)
	key := func() string {
		t.Helper()
		b, err := newBuilder(context.Background(), &Settings{Root: root, CacheDir: t.TempDir()})
		if err != nil {
			t.Fatal(err)
		}
		in, err := b.inputs(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		return in.key
	}
	first := key()
	if again := key(); again != first {
		t.Errorf("same inputs, keys %s and %s", first, again)
	}
	seen := map[string]string{first: "nothing"}
	for _, c := range []struct{ name, path, text string }{
		{"a package linked in", "part/part.go", "package part\n\nconst Part = 2\n"},
		{"a new file", "part/more.go", "package part\n"},
		{"the main package", "notebooks/kernel/main/main.go", smallMain + "\n// changed\n"},
	} {
		write(t, filepath.Join(root, filepath.FromSlash(c.path)), c.text)
		k := key()
		if before, ok := seen[k]; ok {
			t.Errorf("after a change of %s the key is that after %s", c.name, before)
		}
		seen[k] = c.name
	}
	now := key()
	write(t, filepath.Join(root, "elsewhere", "e.go"), "package elsewhere\n")
	write(t, filepath.Join(root, "part", "part_test.go"), "package part\n")
	if key() != now {
		t.Error("a file that is not linked in changes the key")
	}
	t.Setenv("GOFLAGS", "-tags=other")
	if key() == now {
		t.Error("other flags leave the key")
	}
}

func TestBuildErrors(t *testing.T) {
	noPrebuilt(t)
	for _, c := range []struct {
		name     string
		settings func(t *testing.T) *Settings
		step     string
		says     string
	}{
		{"no such Go tool", func(t *testing.T) *Settings { return &Settings{Go: filepath.Join(t.TempDir(), "go")} }, "go tool", "Install Go 1.26"},
		{"no module", func(t *testing.T) *Settings { return &Settings{Root: t.TempDir()} }, "sources", "go.mod"},
		{"code that does not compile", func(t *testing.T) *Settings { return &Settings{Root: smallModule(t, smallMain)} }, "build", "newInterp"},
		{"cache that is a file", func(t *testing.T) *Settings {
			path := filepath.Join(t.TempDir(), "file")
			write(t, path, "")
			return &Settings{CacheDir: filepath.Join(path, "cache")}
		}, "cache", "writable"},
	} {
		t.Run(c.name, func(t *testing.T) {
			s := c.settings(t)
			if s.CacheDir == "" {
				s.CacheDir = t.TempDir()
			}
			_, err := Ensure(context.Background(), s)
			var failed *BuildError
			if !errors.As(err, &failed) || failed.Step != c.step || !strings.Contains(err.Error(), c.says) {
				t.Errorf("error %v", err)
			}
		})
	}
}

func TestVendorIsNamed(t *testing.T) {
	noPrebuilt(t)
	t.Setenv("GOFLAGS", "-mod=vendor")
	_, err := Ensure(context.Background(), &Settings{CacheDir: t.TempDir()})
	var failed *BuildError
	if !errors.As(err, &failed) || !strings.Contains(failed.Remedy, "Unset GOFLAGS=-mod=vendor") {
		t.Errorf("error %v", err)
	}
}

// An older Go says what our go.mod wants; the words are those of the tool.
func TestOlderGoIsNamed(t *testing.T) {
	err := toolError(context.Background(), "sources", errors.New("exit status 1"), "go: go.mod requires go >= 1.26 (running go 1.24.1; GOTOOLCHAIN=local)")
	var failed *BuildError
	if !errors.As(err, &failed) || !strings.Contains(failed.Remedy, "Install a newer Go") {
		t.Errorf("error %v", err)
	}
	text, readErr := os.ReadFile(filepath.Join("..", "..", "go.mod"))
	if readErr != nil || !strings.Contains(string(text), "\ngo 1.26") || strings.Contains(string(text), "\ntoolchain ") {
		t.Errorf("go.mod asks for another toolchain: %v", readErr)
	}
}

func TestNoGoTool(t *testing.T) {
	noPrebuilt(t)
	t.Setenv("PATH", t.TempDir())
	t.Setenv("GOROOT", "")
	_, err := Ensure(context.Background(), nil)
	var failed *BuildError
	if !errors.As(err, &failed) || failed.Step != "go tool" || !strings.Contains(failed.Remedy, "PATH") {
		t.Errorf("error %v", err)
	}
}

func TestCancelledBuild(t *testing.T) {
	noPrebuilt(t)
	ctx, cancel := context.WithCancel(context.Background())
	cache := t.TempDir()
	_, err := Ensure(ctx, &Settings{CacheDir: cache, Progress: func(Progress) { cancel() }})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
	if left, _ := filepath.Glob(filepath.Join(cache, "kernel-*")); len(left) > 0 {
		t.Errorf("left behind: %q", left)
	}
	if _, err := Ensure(ctx, nil); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled before: %v", err)
	}
}

func TestPrune(t *testing.T) {
	cache := t.TempDir()
	b := &builder{cache: cache}
	var paths []string
	for i, name := range []string{"e", "d", "c", "b", "a"} {
		path := b.binary(name)
		write(t, path, name)
		at := time.Now().Add(time.Duration(i-10) * time.Hour)
		if err := os.Chtimes(path, at, at); err != nil {
			t.Fatal(err)
		}
		paths = append(paths, path)
	}
	b.prune(paths[0])
	for i, want := range []bool{true, false, false, true, true} {
		if _, err := os.Stat(paths[i]); (err == nil) != want {
			t.Errorf("%s: %v", paths[i], err)
		}
	}
}

func TestLastLines(t *testing.T) {
	if got := lastLines("a\nb\nc\n", 2); got != "b\nc" {
		t.Errorf("%q", got)
	}
}

// TestDocumentation looks whether the comments of what cells import are found, ours,
// third parties' and the standard library's.
func TestDocumentation(t *testing.T) {
	noPrebuilt(t)
	b, err := newBuilder(context.Background(), &Settings{CacheDir: t.TempDir()})
	if err != nil {
		t.Fatal(err)
	}
	in, err := b.inputs(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	text, err := in.documentation()
	if err != nil {
		t.Fatal(err)
	}
	for _, path := range append(bindings.Bound(), "fmt", "strings", "time") {
		if !strings.Contains(string(text), "\t\""+path+"\":") {
			t.Errorf("no comments of %s", path)
		}
	}
	if len(text) > 3<<20 {
		t.Errorf("the comments take %d bytes", len(text))
	}
}
