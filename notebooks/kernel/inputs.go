package kernel

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"hash"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"sort"
	"strings"
	"time"

	"thinward/notebooks/bindings"
	"thinward/notebooks/kernel/docs"
)

const (
	mainPackage = "./notebooks/kernel/main"
	gophernotes = "github.com/gopherdata/gophernotes"
	// linkFlags leave out what only debuggers read.
	linkFlags = "-s -w"
)

// inputs are all that a kernel is made of.
type inputs struct {
	key     string
	dir     string            // of gophernotes' sources
	sources []string          // their names, without those left out
	edited  map[string]string // name to text, of those that edits change
	docs    []listed          // the packages whose comments cells can ask for
}

type listed struct {
	ImportPath string
	Dir        string
	GoFiles    []string
	CgoFiles   []string
	EmbedFiles []string
	Module     *struct{ Main bool }
}

// inputs finds the sources and makes the key. Looking for the package, and not
// for its module, also downloads it.
func (b *builder) inputs(ctx context.Context) (*inputs, error) {
	out, err := b.run(ctx, "sources", "list", "-tags", "kernel", "-deps",
		"-json=ImportPath,Dir,GoFiles,CgoFiles,EmbedFiles,Module", mainPackage, gophernotes)
	if err != nil {
		return nil, err
	}
	version, err := b.run(ctx, "go tool", "env", "GOVERSION", "GOOS", "GOARCH", "CGO_ENABLED", "GOFLAGS")
	if err != nil {
		return nil, err
	}
	in := &inputs{edited: map[string]string{}}
	sum := sha256.New()
	part(sum, "toolchain", version)
	part(sum, "flags", []byte(linkFlags))
	for _, name := range []string{"go.mod", "go.sum"} {
		if err := filePart(sum, name, filepath.Join(b.root, name)); err != nil {
			return nil, err
		}
	}
	var ours []listed
	for dec := json.NewDecoder(bytes.NewReader(out)); ; {
		var p listed
		if err := dec.Decode(&p); err == io.EOF {
			break
		} else if err != nil {
			return nil, &BuildError{Step: "sources", Err: err}
		}
		switch {
		case p.ImportPath == gophernotes:
			in.dir = p.Dir
			in.sources = p.GoFiles
		case p.Module != nil && p.Module.Main:
			ours = append(ours, p)
		}
		if bindings.Holds(p.ImportPath) && len(p.GoFiles) > 0 {
			in.docs = append(in.docs, p)
		}
	}
	if in.dir == "" {
		return nil, &BuildError{Step: "sources", Err: errors.New("no sources of " + gophernotes), Remedy: "It must stand in go.mod as a tool."}
	}
	if err := in.edit(sum); err != nil {
		return nil, err
	}
	sort.Slice(ours, func(i, j int) bool { return ours[i].ImportPath < ours[j].ImportPath })
	for _, p := range ours {
		for _, name := range append(append(append([]string(nil), p.GoFiles...), p.CgoFiles...), p.EmbedFiles...) {
			if err := filePart(sum, p.ImportPath+"/"+name, filepath.Join(p.Dir, name)); err != nil {
				return nil, err
			}
		}
	}
	in.key = hex.EncodeToString(sum.Sum(nil))[:20]
	return in, nil
}

// edit reads gophernotes' sources, makes the edits and adds both to the key.
func (in *inputs) edit(sum hash.Hash) error {
	if err := checkEdits(in.sources, edits); err != nil {
		return err
	}
	var rest []string
	for _, name := range in.sources {
		if leftOut[name] {
			continue
		}
		rest = append(rest, name)
		text, err := os.ReadFile(filepath.Join(in.dir, name))
		if err != nil {
			return &BuildError{Step: "sources", Err: err}
		}
		changed, err := applyEdits(name, string(text), edits)
		if err != nil {
			return err
		}
		if changed != string(text) {
			in.edited[name] = changed
		}
		part(sum, gophernotes+"/"+name, []byte(changed))
	}
	in.sources = rest
	return nil
}

// documentation makes the source that carries the comments of all packages that
// cells can import.
func (in *inputs) documentation() ([]byte, error) {
	packages := map[string]*docs.Package{}
	for _, p := range in.docs {
		// A package whose comments cannot be read is no reason to have no kernel.
		if extracted, err := docs.Extract(p.ImportPath, p.Dir, p.GoFiles); err == nil {
			packages[p.ImportPath] = extracted
		}
	}
	return docs.Source(packages)
}

// part adds a name and a content to a sum so that no two lists of parts give the
// same bytes.
func part(sum hash.Hash, name string, content []byte) {
	fmt.Fprintf(sum, "%d %s %d ", len(name), name, len(content))
	sum.Write(content)
}

func filePart(sum hash.Hash, name, path string) error {
	content, err := os.ReadFile(path)
	if err != nil {
		return &BuildError{Step: "sources", Err: err}
	}
	part(sum, name, content)
	return nil
}

// run runs the Go tool in our module and gives what it printed.
func (b *builder) run(ctx context.Context, step string, args ...string) ([]byte, error) {
	cmd := b.command(ctx, args...)
	var out, errs bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &errs
	if err := cmd.Run(); err != nil {
		return nil, toolError(ctx, step, err, errs.String())
	}
	return out.Bytes(), nil
}

func (b *builder) command(ctx context.Context, args ...string) *exec.Cmd {
	cmd := exec.CommandContext(ctx, b.goTool, args...)
	cmd.Dir = b.root
	// A workspace around the clone does not know our module.
	cmd.Env = append(os.Environ(), "GOWORK=off", "PWD="+b.root)
	cmd.Cancel = func() error { return cmd.Process.Signal(os.Interrupt) }
	cmd.WaitDelay = 5 * time.Second
	return cmd
}

func toolError(ctx context.Context, step string, err error, output string) error {
	if ctx.Err() != nil {
		return ctx.Err()
	}
	e := &BuildError{Step: step, Err: err, Output: lastLines(output, 20)}
	var notRun *exec.Error
	var fromOS *os.PathError
	switch {
	case errors.As(err, &notRun), errors.As(err, &fromOS):
		e.Step = "go tool"
		e.Remedy = "Install Go 1.26 or later, or put its bin folder on PATH: the kernel is compiled on this machine."
	case strings.Contains(output, "module lookup disabled") || strings.Contains(output, "dial tcp"):
		e.Remedy = "The sources are downloaded once: connect to the network, or run it where GOMODCACHE holds them."
	case strings.Contains(output, "requires go >="):
		e.Remedy = "Install a newer Go, or allow the tool to fetch one with GOTOOLCHAIN=auto."
	case strings.Contains(output, "-mod=vendor") || strings.Contains(output, "vendor/modules.txt"):
		e.Remedy = "Unset GOFLAGS=-mod=vendor: the kernel is built from the module cache."
	case strings.Contains(output, "no space left"):
		e.Remedy = "Make room: the build needs about 600 MB."
	}
	return e
}

func lastLines(s string, n int) string {
	lines := strings.Split(strings.TrimRight(s, "\n"), "\n")
	if len(lines) > n {
		lines = lines[len(lines)-n:]
	}
	return strings.Join(lines, "\n")
}
