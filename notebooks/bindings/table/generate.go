package table

import (
	"bytes"
	"context"
	"fmt"
	"go/format"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"sort"
	"strings"

	"thinward/notebooks/bindings/load"
)

// interpreterTables is the package that holds the interpreter's own tables.
const interpreterTables = "github.com/cosmos72/gomacro/imports"

// fixturePackage is bound for the tests only; its table is not in the kernel.
const fixturePackage = "thinward/notebooks/bindings/fixture"

// Files makes everything that is generated: paths relative to the bindings
// folder, and texts. root is the folder of our go.mod.
func Files(ctx context.Context, root string, directives []Directive) (map[string][]byte, error) {
	patterns := []string{interpreterTables, fixturePackage}
	for _, d := range directives {
		if !d.Skip {
			patterns = append(patterns, d.Pattern)
		}
	}
	set, err := load.Packages(ctx, root, patterns...)
	if err != nil {
		return nil, err
	}
	files := map[string][]byte{}
	var bound []string
	for _, path := range set.Named() {
		d := directiveFor(directives, path)
		if d == nil || d.Skip || set.Name(path) == "main" || hasElement(path, "internal") {
			continue
		}
		text, err := tableOf(set, path, d)
		if err != nil {
			return nil, err
		}
		files["tables/"+folder(path)+"/table.go"] = text
		bound = append(bound, path)
	}
	if files["fixture/table/table.go"], err = tableOf(set, fixturePackage, &Directive{All: true}); err != nil {
		return nil, err
	}
	standard, err := heldByInterpreter(set)
	if err != nil {
		return nil, err
	}
	if files["tables.go"], err = importAll(bound); err != nil {
		return nil, err
	}
	files["list.go"], err = listAll(set, bound, standard)
	return files, err
}

func tableOf(set *load.Set, path string, d *Directive) ([]byte, error) {
	pkg, err := set.Import(path)
	if err != nil {
		return nil, err
	}
	old, err := deprecated(set.Sources(path))
	if err != nil {
		return nil, err
	}
	note := ""
	if set.Standard(path) {
		note = standardNote()
	}
	return Write(pkg, d, old, note)
}

// standardNote tells which standard library a table was made from: a newer one
// exports more.
func standardNote() string {
	version := runtime.Version()
	if parts := strings.SplitN(version, ".", 3); len(parts) == 3 {
		version = parts[0] + "." + parts[1]
	}
	return "Standard library of " + version + "."
}

func hasElement(path, element string) bool {
	return strings.Contains("/"+path+"/", "/"+element+"/")
}

// folder is the name of a package's table: its path without signs.
func folder(path string) string {
	return strings.NewReplacer("/", "_", ".", "_", "-", "_").Replace(path)
}

var registered = regexp.MustCompile(`Packages\["([^"]+)"\] = Package\{`)

// heldByInterpreter lists the packages of the standard library that the
// interpreter has tables of.
func heldByInterpreter(set *load.Set) ([]string, error) {
	dir, names := set.Sources(interpreterTables)
	var out []string
	for _, name := range names {
		text, err := os.ReadFile(filepath.Join(dir, name))
		if err != nil {
			return nil, err
		}
		for _, m := range registered.FindAllSubmatch(text, -1) {
			path := string(m[1])
			if first, _, _ := strings.Cut(path, "/"); !strings.Contains(first, ".") {
				out = append(out, path)
			}
		}
	}
	sort.Strings(out)
	return out, nil
}

func importAll(bound []string) ([]byte, error) {
	var b bytes.Buffer
	fmt.Fprintf(&b, "%s\n\n//go:build kernel\n\npackage bindings\n\nimport (\n", Header)
	for _, p := range bound {
		fmt.Fprintf(&b, "_ %q\n", "thinward/notebooks/bindings/tables/"+folder(p))
	}
	fmt.Fprint(&b, ")\n")
	return format.Source(b.Bytes())
}

func listAll(set *load.Set, bound, standard []string) ([]byte, error) {
	var b bytes.Buffer
	fmt.Fprintf(&b, "%s\n\npackage bindings\n", Header)
	in := map[string]bool{}
	for _, p := range standard {
		in[p] = true
	}
	var ours []string
	for _, p := range bound {
		if set.Standard(p) {
			if !in[p] {
				standard = append(standard, p)
			}
			continue
		}
		ours = append(ours, p)
	}
	sort.Strings(standard)
	for _, l := range []struct {
		doc, name string
		paths     []string
	}{{"ours and third parties'", "bound", ours}, {"of the standard library", "standard", standard}} {
		fmt.Fprintf(&b, "\n// %s are the packages %s.\nvar %s = [...]string{\n", l.name, l.doc, l.name)
		for _, p := range l.paths {
			fmt.Fprintf(&b, "%q,\n", p)
		}
		fmt.Fprint(&b, "}\n")
	}
	return format.Source(b.Bytes())
}

// Save writes the files below dir and removes tables that are no longer made.
func Save(dir string, files map[string][]byte) error {
	have, err := filepath.Glob(filepath.Join(dir, "tables", "*", "table.go"))
	if err != nil {
		return err
	}
	for _, path := range have {
		rel, err := filepath.Rel(dir, path)
		if err != nil {
			return err
		}
		if files[filepath.ToSlash(rel)] == nil {
			if err := os.RemoveAll(filepath.Dir(path)); err != nil {
				return err
			}
		}
	}
	for name, text := range files {
		path := filepath.Join(dir, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			return err
		}
		if old, err := os.ReadFile(path); err == nil && bytes.Equal(old, text) {
			continue
		}
		// Somebody may be compiling it.
		if err := os.WriteFile(path+".new", text, 0o644); err != nil {
			return err
		}
		if err := os.Rename(path+".new", path); err != nil {
			return err
		}
	}
	return nil
}
