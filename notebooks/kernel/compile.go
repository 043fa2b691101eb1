package kernel

import (
	"bufio"
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// compile builds the kernel in a folder of its own beside its place, and gives
// the binary and what removes the folder.
func (b *builder) compile(ctx context.Context, in *inputs, path string) (fresh string, remove func(), err error) {
	b.progress(Progress{})
	dir, err := os.MkdirTemp(b.cache, "build-")
	if err != nil {
		return "", nil, cacheError(err)
	}
	clear := func() { _ = os.RemoveAll(dir) }
	defer func() {
		if err != nil {
			clear()
		}
	}()
	overlay, err := b.writeOverlay(in)
	if err != nil {
		return "", nil, cacheError(err)
	}
	stale, err := b.run(ctx, "build", "list", "-tags", "kernel", "-overlay", overlay, "-deps",
		"-f", "{{if .Stale}}{{.ImportPath}}{{end}}", mainPackage)
	if err != nil {
		return "", nil, err
	}
	total := len(strings.Fields(string(stale)))
	b.progress(Progress{Total: total})
	fresh = filepath.Join(dir, filepath.Base(path))
	return fresh, clear, b.build(ctx, overlay, fresh, total)
}

// docsFile is the source with the comments, made for the build.
const docsFile = "docs_table.go"

// writeOverlay writes the edited copies, the comments and the overlay that lays
// them and the unchanged sources beside our main package. Their place is the same for every
// build, so that the Go tool finds its own cached results again; the lock keeps
// two builds from writing at once.
func (b *builder) writeOverlay(in *inputs) (string, error) {
	dir := filepath.Join(b.cache, "edited")
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return "", err
	}
	replace := map[string]string{}
	text, err := in.documentation()
	if err != nil {
		return "", err
	}
	place := filepath.Join(dir, docsFile)
	if err := writeIfNew(place, text); err != nil {
		return "", err
	}
	replace[filepath.Join(b.root, "notebooks", "kernel", "main", docsFile)] = place
	for _, name := range in.sources {
		from := filepath.Join(in.dir, name)
		if text, ok := in.edited[name]; ok {
			from = filepath.Join(dir, name)
			if err := writeIfNew(from, []byte(text)); err != nil {
				return "", err
			}
		}
		replace[filepath.Join(b.root, "notebooks", "kernel", "main", "gophernotes_"+name)] = from
	}
	text, err = json.MarshalIndent(map[string]any{"Replace": replace}, "", "\t")
	if err != nil {
		return "", err
	}
	overlay := filepath.Join(dir, "overlay.json")
	return overlay, writeIfNew(overlay, text)
}

func writeIfNew(path string, text []byte) error {
	old, err := os.ReadFile(path)
	if err == nil && bytes.Equal(old, text) {
		return nil
	}
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	return os.WriteFile(path, text, 0o644)
}

// build runs go build -v, which names each package as it is built.
func (b *builder) build(ctx context.Context, overlay, to string, total int) error {
	cmd := b.command(ctx, "build", "-v", "-buildvcs=false", "-tags", "kernel", "-overlay", overlay,
		"-ldflags", linkFlags, "-o", to, mainPackage)
	pipe, err := cmd.StderrPipe()
	if err != nil {
		return &BuildError{Step: "build", Err: err}
	}
	if err := cmd.Start(); err != nil {
		return toolError(ctx, "build", err, "")
	}
	var said strings.Builder
	done := 0
	lines := bufio.NewScanner(pipe)
	lines.Buffer(nil, 1<<20)
	for lines.Scan() {
		line := lines.Text()
		// Package paths stand alone on their line; all else is a message.
		if line == "" || strings.ContainsAny(line, " \t:#") {
			said.WriteString(line + "\n")
			continue
		}
		done++
		b.progress(Progress{Done: done, Total: max(total, done), Package: line})
	}
	if err := cmd.Wait(); err != nil {
		return toolError(ctx, "build", err, said.String())
	}
	// The main package counts as stale when it only has to be linked.
	b.progress(Progress{Done: max(total, done), Total: max(total, done)})
	return nil
}
