// Package load reads the types of compiled packages: export data that go list
// made, and the folders of their sources. It uses the standard library only.
//
// It is not for syntax trees or function bodies.
package load

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"go/importer"
	"go/token"
	"go/types"
	"io"
	"os"
	"os/exec"
	"sort"
)

// Set is a set of packages with everything they need.
type Set struct {
	named    []string // as matched by the patterns, sorted
	found    map[string]entry
	importer types.Importer
}

type entry struct {
	ImportPath string
	Name       string
	Export     string
	Dir        string
	GoFiles    []string
	DepOnly    bool
	Standard   bool
}

// Packages loads the packages that match the patterns, as seen from folder dir.
// Packages are compiled where the build cache does not hold them. A package that
// does not compile is an error.
func Packages(ctx context.Context, dir string, patterns ...string) (*Set, error) {
	args := append([]string{"list", "-export", "-deps", "-json=ImportPath,Name,Export,Dir,GoFiles,DepOnly,Standard", "--"}, patterns...)
	cmd := exec.CommandContext(ctx, "go", args...)
	cmd.Dir = dir
	var errs bytes.Buffer
	cmd.Stderr = &errs
	out, err := cmd.Output()
	if err != nil {
		return nil, fmt.Errorf("go list: %w\n%s", err, errs.String())
	}
	s := &Set{found: map[string]entry{}}
	for dec := json.NewDecoder(bytes.NewReader(out)); ; {
		var e entry
		if err := dec.Decode(&e); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			return nil, fmt.Errorf("go list: %w", err)
		}
		s.found[e.ImportPath] = e
		if !e.DepOnly {
			s.named = append(s.named, e.ImportPath)
		}
	}
	sort.Strings(s.named)
	s.importer = importer.ForCompiler(token.NewFileSet(), "gc", func(path string) (io.ReadCloser, error) {
		e, ok := s.found[path]
		if !ok || e.Export == "" {
			return nil, fmt.Errorf("no export data of %s", path)
		}
		return os.Open(e.Export)
	})
	return s, nil
}

// Named gives the paths that the patterns matched, sorted.
func (s *Set) Named() []string { return append([]string(nil), s.named...) }

// Name gives the name of a package; empty if it is not in the set.
func (s *Set) Name(path string) string { return s.found[path].Name }

// Standard tells whether a package belongs to the standard library.
func (s *Set) Standard(path string) bool { return s.found[path].Standard }

// Sources gives the folder of a package and the names of its sources.
func (s *Set) Sources(path string) (dir string, files []string) {
	e := s.found[path]
	return e.Dir, append([]string(nil), e.GoFiles...)
}

// Import gives the types of a package of the set; it makes Set a types.Importer.
func (s *Set) Import(path string) (*types.Package, error) { return s.importer.Import(path) }
