package runner

import (
	"fmt"
	"go/ast"
	"go/parser"
	"go/token"
	"math"
	"slices"
	"sort"
	"strconv"
	"strings"
)

const (
	parametersTag = "parameters"
	setTag        = "set-parameters" // of the cell that Run puts behind the declaring one
)

// Parameter is a name that the cell tagged parameters declares with a literal.
type Parameter struct {
	Name    string
	Literal string // as declared, with its sign
	Kind    token.Token
}

// Parameters lists what the notebook's cell tagged parameters declares with
// literals: name := literal, var name = literal, and true and false (of Kind
// token.IDENT). Other statements of the cell declare no parameters. Two cells
// with the tag, or one that does not parse, are errors.
func Parameters(nb *Notebook) ([]Parameter, error) {
	list, _, err := declarations(nb)
	return list, err
}

// declarations gives the parameters, and the source of what the other names that
// the cell declares are set to.
func declarations(nb *Notebook) (out []Parameter, others map[string]string, err error) {
	at, err := parametersCell(nb)
	if err != nil || at < 0 {
		return nil, nil, err
	}
	source := "package p\nfunc _() {\n" + nb.Cells[at].Source + "\n}"
	file, err := parser.ParseFile(token.NewFileSet(), "", source, 0)
	if err != nil {
		return nil, nil, fmt.Errorf("the cell tagged %s does not parse: %w", parametersTag, err)
	}
	others = map[string]string{}
	declare := func(name string, value ast.Expr) {
		if p, ok := literal(value); ok {
			p.Name = name
			out = append(out, p)
			return
		}
		// Positions count from 1.
		others[name] = source[value.Pos()-1 : value.End()-1]
	}
	for _, s := range file.Decls[0].(*ast.FuncDecl).Body.List {
		switch s := s.(type) {
		case *ast.AssignStmt:
			if s.Tok != token.DEFINE || len(s.Lhs) != len(s.Rhs) {
				continue
			}
			for i := range s.Lhs {
				declare(s.Lhs[i].(*ast.Ident).Name, s.Rhs[i])
			}
		case *ast.DeclStmt:
			for _, spec := range s.Decl.(*ast.GenDecl).Specs {
				v, ok := spec.(*ast.ValueSpec)
				if !ok || s.Decl.(*ast.GenDecl).Tok != token.VAR || len(v.Names) != len(v.Values) {
					continue
				}
				for i := range v.Names {
					declare(v.Names[i].Name, v.Values[i])
				}
			}
		}
	}
	return out, others, nil
}

func parametersCell(nb *Notebook) (int, error) {
	at := -1
	for i, c := range nb.Cells {
		if c.Type != "code" || !c.HasTag(parametersTag) {
			continue
		}
		if at >= 0 {
			return -1, fmt.Errorf("two cells are tagged %s", parametersTag)
		}
		at = i
	}
	return at, nil
}

func literal(e ast.Expr) (Parameter, bool) {
	sign := ""
	if u, ok := e.(*ast.UnaryExpr); ok && (u.Op == token.SUB || u.Op == token.ADD) {
		sign, e = u.Op.String(), u.X
	}
	switch e := e.(type) {
	case *ast.BasicLit:
		signed := sign != ""
		if e.Kind == token.INT || e.Kind == token.FLOAT || e.Kind == token.STRING && !signed {
			return Parameter{Literal: sign + e.Value, Kind: e.Kind}, true
		}
	case *ast.Ident:
		if sign == "" && (e.Name == "true" || e.Name == "false") {
			return Parameter{Literal: e.Name, Kind: token.IDENT}, true
		}
	}
	return Parameter{}, false
}

// typed gives value as a literal of the declared kind.
func (p Parameter) typed(value string) (lit, want string) {
	switch p.Kind {
	case token.STRING:
		return strconv.Quote(value), ""
	case token.INT:
		n, err := strconv.ParseInt(value, 0, 64)
		if err != nil {
			return "", "a whole number"
		}
		return strconv.FormatInt(n, 10), ""
	case token.FLOAT:
		x, err := strconv.ParseFloat(value, 64)
		if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
			return "", "a number"
		}
		s := strconv.FormatFloat(x, 'g', -1, 64)
		if !strings.ContainsAny(s, ".e") {
			s += ".0"
		}
		return s, ""
	default:
		b, err := strconv.ParseBool(value)
		if err != nil {
			return "", "true or false"
		}
		return strconv.FormatBool(b), ""
	}
}

// setParameters puts a cell with the new values behind the one that declares
// them, in place of such a cell from an earlier run.
func setParameters(nb *Notebook, set map[string]string) (used, declared map[string]string, err error) {
	nb.Cells = slices.DeleteFunc(nb.Cells, func(c *Cell) bool { return c.Type == "code" && c.HasTag(setTag) })
	params, others, err := declarations(nb)
	if err != nil {
		return nil, nil, err
	}
	used, declared = map[string]string{}, map[string]string{}
	byName := map[string]Parameter{}
	var known []string
	for _, p := range params {
		if _, again := byName[p.Name]; !again {
			known = append(known, p.Name)
		}
		byName[p.Name] = p
		used[p.Name], declared[p.Name] = p.Literal, p.Literal
	}
	sort.Strings(known)
	var names []string
	for name := range set {
		names = append(names, name)
	}
	sort.Strings(names)
	var code []string
	for _, name := range names {
		p, ok := byName[name]
		if source, declared := others[name]; !ok && declared {
			return nil, nil, &ParameterError{Name: name, Value: set[name], Reason: "not settable", Declared: source, Known: known}
		}
		if !ok {
			return nil, nil, &ParameterError{Name: name, Value: set[name], Reason: "unknown", Known: known}
		}
		lit, want := p.typed(set[name])
		if want != "" {
			return nil, nil, &ParameterError{Name: name, Value: set[name], Reason: want, Known: known}
		}
		used[name] = lit
		code = append(code, name+" = "+lit)
	}
	if len(code) == 0 {
		return used, declared, nil
	}
	at, err := parametersCell(nb)
	if err != nil {
		return nil, nil, err
	}
	nb.Cells = slices.Insert(nb.Cells, at+1, &Cell{ID: setTag, Type: "code", Tags: []string{setTag}, Source: strings.Join(code, "\n")})
	return used, declared, nil
}
