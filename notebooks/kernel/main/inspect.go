//go:build kernel

package main

import (
	"fmt"
	"go/ast"
	"go/parser"
	"reflect"
	"strings"

	interp "github.com/cosmos72/gomacro/fast"
	"github.com/cosmos72/gomacro/imports"

	"thinward/notebooks/kernel/docs"
	"thinward/notebooks/kernel/host"
)

// library holds the doc comments; docTables is written when the kernel is built.
var library = docs.NewLibrary(docTables)

// entity is what a name in a cell stands for.
type entity struct {
	pkg    string       // import path, of a package
	typ    reflect.Type // of a value, or the type itself
	isType bool
	name   string // as a cell writes it, of a variable
	doc    docs.Entry
	known  bool // doc is set
}

// replyInspect answers the question what stands at the cursor.
func replyInspect(receipt msgReceipt) error {
	request, _ := receipt.Msg.Content.(map[string]interface{})
	code, _ := request["code"].(string)
	cursor, _ := request["cursor_pos"].(float64)
	data := map[string]interface{}{}
	text := explain(host.Subject(code, host.ByteOffset(code, int(cursor))))
	if text != "" {
		data[MIMETypeText] = text
	}
	return receipt.Reply("inspect_reply", map[string]interface{}{
		"status": "ok", "found": text != "", "data": data, "metadata": map[string]interface{}{}})
}

// explain gives the text about an expression, empty when it stands for nothing
// that is known. It runs none of the code in it.
func explain(subject string) (text string) {
	defer func() {
		if recover() != nil {
			text = "" // the interpreter's own look-up may panic on half a cell
		}
	}()
	expr, err := parser.ParseExpr(subject)
	if err != nil {
		return ""
	}
	e, ok := resolve(expr)
	if !ok {
		return ""
	}
	return e.text()
}

func (e *entity) text() string {
	switch {
	case e.pkg != "":
		if p := library.Package(e.pkg); p != nil {
			return p.Text(e.pkg)
		}
		return fmt.Sprintf("package %q", e.pkg)
	case e.known:
		return e.doc.Text()
	case e.typ == nil:
		return ""
	case e.isType:
		return "type " + e.typ.String()
	}
	text := strings.TrimSpace(e.name + " " + e.typ.String())
	if of, ok := typeDoc(e.typ); ok {
		text += "\n\n" + of.Text()
	}
	return text
}

// typeDoc gives what is said of a type, or of what it points to.
func typeDoc(t reflect.Type) (docs.Entry, bool) {
	if t.Kind() == reflect.Pointer {
		t = t.Elem()
	}
	return library.Entry(t.PkgPath(), t.Name())
}

func resolve(expr ast.Expr) (*entity, bool) {
	switch x := expr.(type) {
	case *ast.Ident:
		return resolveName(x.Name)
	case *ast.ParenExpr:
		return resolve(x.X)
	case *ast.SelectorExpr:
		of, ok := resolve(x.X)
		if !ok {
			return nil, false
		}
		return of.member(x.Sel.Name)
	case *ast.CallExpr:
		f, ok := resolve(x.Fun)
		switch {
		case !ok || f.typ == nil:
			return nil, false
		case f.isType:
			return &entity{typ: f.typ}, true
		case f.typ.Kind() == reflect.Func && f.typ.NumOut() > 0:
			return &entity{typ: f.typ.Out(0)}, true
		}
	case *ast.IndexExpr:
		of, ok := resolve(x.X)
		if !ok || of.typ == nil {
			return nil, false
		}
		switch of.typ.Kind() {
		case reflect.Slice, reflect.Array, reflect.Map:
			return &entity{typ: of.typ.Elem()}, true
		}
	}
	return nil, false
}

func resolveName(name string) (*entity, bool) {
	if sym := interpreter.Comp.TryResolve(name); sym != nil {
		if imp, ok := sym.Value.(*interp.Import); ok {
			return &entity{pkg: imp.Path}, true
		}
		if sym.Type == nil {
			return nil, false
		}
		return &entity{typ: sym.Type.ReflectType(), name: name}, true
	}
	if t := interpreter.Comp.TryResolveType(name); t != nil {
		return &entity{typ: t.ReflectType(), isType: true}, true
	}
	return nil, false
}

func (e *entity) member(name string) (*entity, bool) {
	if e.pkg != "" {
		table := imports.Packages[e.pkg]
		m := &entity{}
		if v, ok := table.Binds[name]; ok {
			m.typ = v.Type()
		} else if t, ok := table.Types[name]; ok {
			m.typ, m.isType = t, true
		} else {
			return nil, false
		}
		m.name = name
		m.doc, m.known = library.Entry(e.pkg, name)
		return m, true
	}
	if e.typ == nil {
		return nil, false
	}
	m := &entity{name: name}
	whole := e.typ
	if whole.Kind() != reflect.Pointer && whole.Kind() != reflect.Interface {
		whole = reflect.PointerTo(whole)
	}
	if method, ok := whole.MethodByName(name); ok {
		m.typ = method.Type
	} else if field, ok := structOf(e.typ).FieldByName(name); ok {
		m.typ = field.Type
	} else {
		return nil, false
	}
	m.doc, m.known = memberDoc(e.typ, name, 0)
	return m, true
}

var noFields = reflect.TypeOf(struct{}{})

// structOf gives a type that may be asked for fields.
func structOf(t reflect.Type) reflect.Type {
	if t.Kind() == reflect.Pointer {
		t = t.Elem()
	}
	if t.Kind() != reflect.Struct {
		return noFields
	}
	return t
}

const deepest = 4 // of embedded types

// memberDoc looks for a method or field where it is declared: at the type, or at
// one that it embeds.
func memberDoc(t reflect.Type, name string, depth int) (docs.Entry, bool) {
	if t.Kind() == reflect.Pointer {
		t = t.Elem()
	}
	if entry, ok := library.Entry(t.PkgPath(), t.Name()+"."+name); ok {
		return entry, true
	}
	s := structOf(t)
	for i := 0; i < s.NumField() && depth < deepest; i++ {
		if f := s.Field(i); f.Anonymous {
			if entry, ok := memberDoc(f.Type, name, depth+1); ok {
				return entry, true
			}
		}
	}
	return docs.Entry{}, false
}
