package docs

import (
	"bytes"
	"fmt"
	"go/ast"
	"go/doc"
	"go/format"
	"go/parser"
	"go/token"
	"path/filepath"
	"strings"
)

// Package is what the sources of one package say of its exported names. Entries
// are keyed by Name for constants, variables, functions and types, and by
// Type.Name for methods and fields.
type Package struct {
	Name    string
	Doc     string
	Entries map[string]Entry
}

// Entry is a declaration without body, and its comment; either may be empty.
type Entry struct {
	Decl string
	Doc  string
}

// Extract reads the sources with the given names in dir. A source that does not
// parse is an error.
func Extract(path, dir string, names []string) (*Package, error) {
	files := token.NewFileSet()
	var parsed []*ast.File
	for _, name := range names {
		f, err := parser.ParseFile(files, filepath.Join(dir, name), nil, parser.ParseComments|parser.SkipObjectResolution)
		if err != nil {
			return nil, err
		}
		parsed = append(parsed, f)
	}
	if len(parsed) == 0 {
		return nil, fmt.Errorf("docs: package %s has no sources", path)
	}
	all, err := doc.NewFromFiles(files, parsed, path)
	if err != nil {
		return nil, err
	}
	e := &extractor{files: files, out: &Package{Name: all.Name, Doc: trimmed(all.Doc), Entries: map[string]Entry{}}}
	e.values("const", all.Consts)
	e.values("var", all.Vars)
	e.functions("", all.Funcs)
	for _, t := range all.Types {
		e.add(t.Name, e.printed(t.Decl), t.Doc)
		e.members(t)
		e.values("const", t.Consts)
		e.values("var", t.Vars)
		e.functions("", t.Funcs)
		e.functions(t.Name+".", t.Methods)
	}
	return e.out, nil
}

type extractor struct {
	files *token.FileSet
	out   *Package
}

func (e *extractor) add(key, decl, text string) {
	e.out.Entries[key] = Entry{Decl: decl, Doc: trimmed(text)}
}

func trimmed(s string) string { return strings.TrimSpace(s) }

// printed gives a declaration as source, without its own comment.
func (e *extractor) printed(node any) string {
	switch d := node.(type) {
	case *ast.FuncDecl:
		bare := *d
		bare.Doc, bare.Body = nil, nil
		node = &bare
	case *ast.GenDecl:
		bare := *d
		bare.Doc = nil
		node = &bare
	}
	var b bytes.Buffer
	if err := format.Node(&b, e.files, node); err != nil {
		return ""
	}
	return b.String()
}

func (e *extractor) functions(prefix string, list []*doc.Func) {
	for _, f := range list {
		e.add(prefix+f.Name, e.printed(f.Decl), f.Doc)
	}
}

// values gives each name of a group a declaration of its own; where it has no
// comment, that of the group stands for it.
func (e *extractor) values(word string, list []*doc.Value) {
	for _, v := range list {
		for _, spec := range v.Decl.Specs {
			s, ok := spec.(*ast.ValueSpec)
			if !ok {
				continue
			}
			text := s.Doc.Text() + s.Comment.Text()
			if trimmed(text) == "" {
				text = v.Doc
			}
			bare := *s
			bare.Doc, bare.Comment = nil, nil
			for _, name := range s.Names {
				if name.IsExported() {
					e.add(name.Name, word+" "+e.printed(&bare), text)
				}
			}
		}
	}
}

// members adds the fields of a struct and the methods of an interface.
func (e *extractor) members(t *doc.Type) {
	for _, spec := range t.Decl.Specs {
		s, ok := spec.(*ast.TypeSpec)
		if !ok || s.Name.Name != t.Name {
			continue
		}
		switch typ := s.Type.(type) {
		case *ast.StructType:
			e.fields(t.Name, "field ", typ.Fields)
		case *ast.InterfaceType:
			e.fields(t.Name, "func ", typ.Methods)
		}
	}
}

func (e *extractor) fields(owner, word string, list *ast.FieldList) {
	for _, f := range list.List {
		for _, name := range f.Names {
			if !name.IsExported() {
				continue
			}
			typ := e.printed(f.Type)
			if word == "func " {
				typ = strings.TrimPrefix(typ, "func")
			} else {
				typ = " " + typ
			}
			e.add(owner+"."+name.Name, word+name.Name+typ, f.Doc.Text()+f.Comment.Text())
		}
	}
}
