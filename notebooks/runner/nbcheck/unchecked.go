package nbcheck

import (
	"context"
	"fmt"
	"go/ast"
	"go/parser"
	"go/token"
	"go/types"
	"sort"
	"strconv"
	"strings"

	"thinward/notebooks/bindings/load"
	"thinward/notebooks/runner"
)

// Finding is a place in a notebook where an error can go unseen.
type Finding struct {
	Cell int // number of the code cell, from 1
	Line int // in the cell, from 1
	Call string
	Why  string
}

// String gives one line.
func (f Finding) String() string {
	return fmt.Sprintf("cell %d line %d: %s: %s", f.Cell, f.Line, f.Call, f.Why)
}

// Unchecked finds calls whose error is dropped, or assigned to a name that the
// same cell does not pass to session.Check afterwards, and calls of which it
// cannot be told what they return. Printing with package fmt, and writing to a
// bytes.Buffer or a strings.Builder, which cannot fail, are left alone. root is
// the folder of our go.mod. A notebook that does not parse is an error.
func Unchecked(ctx context.Context, root string, nb *runner.Notebook) ([]Finding, error) {
	text, imports := source(nb)
	files := token.NewFileSet()
	file, err := parser.ParseFile(files, "notebook", text, parser.SkipObjectResolution)
	if err != nil {
		return nil, err
	}
	c := &checker{files: files, info: &types.Info{Types: map[ast.Expr]types.TypeAndValue{}, Uses: map[*ast.Ident]types.Object{}, Selections: map[*ast.SelectorExpr]*types.Selection{}}}
	var real []string
	for _, p := range imports {
		if p != "display" {
			real = append(real, p)
		}
	}
	var set types.Importer = none{}
	if len(real) > 0 {
		if set, err = load.Packages(ctx, root, real...); err != nil {
			return nil, err
		}
	}
	// Cells may declare a name twice, end in a value, and leave things unused; the
	// checker goes on past all of it.
	conf := types.Config{Importer: set, Error: func(error) {}}
	_, _ = conf.Check("notebook", files, []*ast.File{file}, c.info)
	ast.Inspect(file, c.visit)
	sort.SliceStable(c.found, func(i, j int) bool {
		a, b := c.found[i], c.found[j]
		return a.Cell < b.Cell || a.Cell == b.Cell && a.Line < b.Line
	})
	return c.found, nil
}

type none struct{}

func (none) Import(path string) (*types.Package, error) {
	return nil, fmt.Errorf("no package %s", path)
}

type checker struct {
	files *token.FileSet
	info  *types.Info
	found []Finding
	block []ast.Stmt // the cells' function
}

func (c *checker) visit(n ast.Node) bool {
	switch n := n.(type) {
	case *ast.FuncDecl:
		c.block = n.Body.List
	case *ast.CallExpr:
		if !c.isKnown(n) {
			c.report(n, "it cannot be told what it returns")
		}
	case *ast.ExprStmt:
		c.dropped(n.X)
	case *ast.GoStmt:
		c.dropped(n.Call)
	case *ast.DeferStmt:
		c.dropped(n.Call)
	case *ast.AssignStmt:
		c.assigned(n.Lhs, n.Rhs)
	case *ast.ValueSpec:
		var left []ast.Expr
		for _, id := range n.Names {
			left = append(left, id)
		}
		c.assigned(left, n.Values)
	}
	return true
}

func (c *checker) isKnown(call *ast.CallExpr) bool {
	t, ok := c.info.Types[call.Fun]
	if id, isName := ast.Unparen(call.Fun).(*ast.Ident); isName {
		if _, builtin := c.info.Uses[id].(*types.Builtin); builtin {
			return true
		}
	}
	if s, isDisplay := ast.Unparen(call.Fun).(*ast.SelectorExpr); isDisplay {
		if id, isName := s.X.(*ast.Ident); isName && id.Name == "display" {
			return true
		}
	}
	return ok && t.Type != nil && t.Type != types.Typ[types.Invalid]
}

func (c *checker) dropped(e ast.Expr) {
	call, ok := ast.Unparen(e).(*ast.CallExpr)
	if ok && len(c.errorsOf(call)) > 0 && !c.cannotFail(call) {
		c.report(call, "its error is dropped")
	}
}

// assigned looks at the names that errors go to.
func (c *checker) assigned(left, right []ast.Expr) {
	for i, e := range right {
		call, ok := ast.Unparen(e).(*ast.CallExpr)
		if !ok {
			continue
		}
		for _, k := range c.errorsOf(call) {
			if len(right) == len(left) {
				k = i
			}
			if k >= len(left) {
				continue
			}
			id, ok := left[k].(*ast.Ident)
			switch {
			case !ok:
				c.report(call, "its error goes where it is not checked")
			case id.Name == "_":
				c.report(call, "its error is dropped")
			case !c.checkedAfter(call, id.Name):
				c.report(call, "its error "+id.Name+" is not passed to session.Check in the same cell")
			}
		}
	}
}

// errorsOf gives the positions of errors among what a call returns.
func (c *checker) errorsOf(call *ast.CallExpr) []int {
	t := c.info.Types[call].Type
	if t == nil {
		return nil
	}
	failing := types.Universe.Lookup("error").Type()
	if tuple, ok := t.(*types.Tuple); ok {
		var out []int
		for i := range tuple.Len() {
			if types.Identical(tuple.At(i).Type(), failing) {
				out = append(out, i)
			}
		}
		return out
	}
	if types.Identical(t, failing) {
		return []int{0}
	}
	return nil
}

func (c *checker) cannotFail(call *ast.CallExpr) bool {
	sel, ok := ast.Unparen(call.Fun).(*ast.SelectorExpr)
	if !ok {
		return false
	}
	if f, ok := c.info.Uses[sel.Sel].(*types.Func); ok && f.Pkg() != nil && f.Pkg().Path() == "fmt" && strings.HasPrefix(f.Name(), "Print") {
		return true
	}
	s := c.info.Selections[sel]
	if s == nil {
		return false
	}
	on := strings.TrimPrefix(s.Recv().String(), "*")
	return on == "bytes.Buffer" || on == "strings.Builder"
}

// checkedAfter looks for session.Check(name) behind a call, in its cell.
func (c *checker) checkedAfter(call *ast.CallExpr, name string) bool {
	found := false
	for _, s := range c.block {
		ast.Inspect(s, func(n ast.Node) bool {
			check, ok := n.(*ast.CallExpr)
			if !ok || check.Pos() < call.End() || len(check.Args) != 1 || c.cell(check) != c.cell(call) {
				return true
			}
			sel, isSelector := check.Fun.(*ast.SelectorExpr)
			arg, isName := check.Args[0].(*ast.Ident)
			if isSelector && isName && sel.Sel.Name == "Check" && arg.Name == name {
				if pkg, ok := sel.X.(*ast.Ident); ok && pkg.Name == "session" {
					found = true
				}
			}
			return true
		})
	}
	return found
}

func (c *checker) cell(n ast.Node) string { return c.files.Position(n.Pos()).Filename }

func (c *checker) report(call *ast.CallExpr, why string) {
	at := c.files.Position(call.Pos())
	number, err := strconv.Atoi(strings.TrimPrefix(at.Filename, "cell"))
	if err != nil {
		number = 0
	}
	c.found = append(c.found, Finding{Cell: number, Line: at.Line, Call: types.ExprString(call.Fun), Why: why})
}
