package tests

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"thinward/notebooks/runner"
	"thinward/notebooks/runner/nbcheck"
)

// Limits of a notebook that one can read.
const (
	mostCells = 25
	mostLines = 6
)

// TestForm: short cells, stable ids, a parameters cell, our kernel, no outputs.
func TestForm(t *testing.T) {
	id := regexp.MustCompile(`^[a-z][0-9]{2}$`)
	seen := map[string]string{}
	for _, name := range names(t) {
		nb := open(t, name)
		var spec struct{ Name string }
		if err := json.Unmarshal(nb.Metadata["kernelspec"], &spec); err != nil || spec.Name != "thinward" {
			t.Errorf("%s: kernel %q (%v)", name, spec.Name, err)
		}
		cells, parameters := 0, 0
		for k, c := range nb.Cells {
			if before, twice := seen[c.ID]; twice || !id.MatchString(c.ID) {
				t.Errorf("%s: cell %d has id %q (also in %q): a letter and two digits, once in all notebooks", name, k, c.ID, before)
			}
			seen[c.ID] = name
			if c.Type != "code" {
				continue
			}
			cells++
			if n := strings.Count(c.Source, "\n") + 1; n > mostLines {
				t.Errorf("%s: cell %s has %d lines, at most %d", name, c.ID, n, mostLines)
			}
			if len(c.Outputs) > 0 || c.Count != 0 {
				t.Errorf("%s: cell %s holds outputs or an execution count: clear them before the commit", name, c.ID)
			}
			if c.HasTag("parameters") {
				parameters++
			}
			if strings.TrimSpace(c.Source) == "" {
				t.Errorf("%s: cell %s is empty", name, c.ID)
			}
		}
		if cells > mostCells || parameters != 1 {
			t.Errorf("%s: %d code cells (at most %d), %d cells tagged parameters (one)", name, cells, mostCells, parameters)
		}
		first, last := nb.Cells[0], nb.Cells[len(nb.Cells)-1]
		if first.Type != "markdown" || !strings.HasPrefix(first.Source, "# ") {
			t.Errorf("%s does not begin with what it answers", name)
		}
		if name != "report.ipynb" && (last.Type != "markdown" || !strings.HasPrefix(last.Source, "## What follows\n") || !strings.Contains(first.Source, "Answers: ")) {
			t.Errorf("%s does not say what it answers or what follows", name)
		}
		data, err := os.ReadFile(filepath.Join("..", name))
		if err != nil {
			t.Fatal(err)
		}
		if bytes.Contains(data, []byte(`"execution_count": 1`)) || !bytes.HasSuffix(data, []byte("}\n")) {
			t.Errorf("%s: not written as committed notebooks are", name)
		}
	}
}

// TestNoArithmetic: cells choose and show; what computes is compiled and tested.
func TestNoArithmetic(t *testing.T) {
	if got := arithmetic(t, "x := 1\ny := 2 * x\nz := math.Sqrt(4)\ns := \"a\" + name"); len(got) != 2 {
		t.Fatalf("found %v, want the product and the root", got)
	}
	for _, name := range names(t) {
		for _, c := range open(t, name).Cells {
			if c.Type == "code" {
				for _, what := range arithmetic(t, c.Source) {
					t.Errorf("%s: cell %s computes: %s", name, c.ID, what)
				}
			}
		}
	}
}

// arithmetic finds operators on numbers and calls of package math. A sum counts
// unless one of its ends is a text.
func arithmetic(t *testing.T, source string) []string {
	t.Helper()
	if strings.HasPrefix(source, "import") {
		return nil
	}
	file, err := parser.ParseFile(token.NewFileSet(), "cell", "package p\nfunc _() {\n"+source+"\n}", 0)
	if err != nil {
		t.Fatalf("%v in\n%s", err, source)
	}
	var out []string
	ast.Inspect(file, func(n ast.Node) bool {
		switch n := n.(type) {
		case *ast.BinaryExpr:
			switch n.Op {
			case token.SUB, token.MUL, token.QUO, token.REM:
				out = append(out, n.Op.String())
			case token.ADD:
				if !text(n) {
					out = append(out, "+")
				}
				return false
			}
		case *ast.AssignStmt:
			if n.Tok != token.ASSIGN && n.Tok != token.DEFINE {
				out = append(out, n.Tok.String())
			}
		case *ast.CallExpr:
			if s, ok := n.Fun.(*ast.SelectorExpr); ok {
				if p, ok := s.X.(*ast.Ident); ok && p.Name == "math" {
					out = append(out, "math."+s.Sel.Name)
				}
			}
		}
		return true
	})
	return out
}

// text tells whether a sum holds a string literal.
func text(e ast.Expr) bool {
	switch e := e.(type) {
	case *ast.BasicLit:
		return e.Kind == token.STRING
	case *ast.BinaryExpr:
		return e.Op == token.ADD && (text(e.X) || text(e.Y))
	case *ast.ParenExpr:
		return text(e.X)
	}
	return false
}

// TestNoUncheckedError: a cell whose call fails must not look green.
func TestNoUncheckedError(t *testing.T) {
	for _, name := range names(t) {
		found, err := nbcheck.Unchecked(context.Background(), root, open(t, name))
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		for _, f := range found {
			t.Errorf("%s: %s", name, f)
		}
	}
}

// TestParameters: each declared parameter takes another value, and an unknown one
// is refused with the list.
func TestParameters(t *testing.T) {
	for _, name := range names(t) {
		_, err := runOn(t, name, map[string]string{"nonsense": "1"})
		if err == nil || !strings.Contains(err.Error(), "series") {
			t.Errorf("%s: an unknown parameter gives %v", name, err)
		}
	}
	res, err := runOn(t, "01-intake.ipynb", map[string]string{"series": filepath.Join(root, "fixtures", "tarn", "none.toml")})
	var failed *runner.CellError
	if !errors.As(err, &failed) || !strings.Contains(failed.Text, "none.toml") || failed.Step != "reading" {
		t.Fatalf("a series that is not there: %v", err)
	}
	if res.Ran != 2 {
		t.Errorf("%d cells ran before the failure, want the import and the parameters", res.Ran)
	}
}
