package table

import (
	"go/ast"
	"go/parser"
	"go/token"
	"path/filepath"
	"strings"
)

// deprecated reads a package's sources for top-level names whose doc comment has
// a paragraph that begins with "Deprecated:"; export data carries no comments.
func deprecated(dir string, files []string) (map[string]bool, error) {
	out := map[string]bool{}
	for _, name := range files {
		f, err := parser.ParseFile(token.NewFileSet(), filepath.Join(dir, name), nil, parser.ParseComments|parser.SkipObjectResolution)
		if err != nil {
			return nil, err
		}
		for _, decl := range f.Decls {
			switch d := decl.(type) {
			case *ast.FuncDecl:
				if d.Recv == nil && isDeprecated(d.Doc) {
					out[d.Name.Name] = true
				}
			case *ast.GenDecl:
				for _, spec := range d.Specs {
					for _, n := range namesOf(spec, isDeprecated(d.Doc)) {
						out[n] = true
					}
				}
			}
		}
	}
	return out, nil
}

// namesOf gives the names a spec declares if it, or the whole declaration, is
// deprecated.
func namesOf(spec ast.Spec, whole bool) []string {
	switch s := spec.(type) {
	case *ast.TypeSpec:
		if whole || isDeprecated(s.Doc) {
			return []string{s.Name.Name}
		}
	case *ast.ValueSpec:
		if whole || isDeprecated(s.Doc) {
			var out []string
			for _, n := range s.Names {
				out = append(out, n.Name)
			}
			return out
		}
	}
	return nil
}

func isDeprecated(doc *ast.CommentGroup) bool {
	for _, paragraph := range strings.Split(doc.Text(), "\n\n") {
		if strings.HasPrefix(paragraph, "Deprecated:") {
			return true
		}
	}
	return false
}
