package runner

import (
	"go/scanner"
	"go/token"
	"strconv"
	"strings"

	"thinward/notebooks/bindings"
)

// checkImports fails at the first import of a package that is not in the kernel.
func checkImports(nb *Notebook) error {
	for i, c := range codeCells(nb) {
		for _, path := range importsOf(c.Source) {
			if !bindings.Holds(path) {
				return &ImportError{Cell: i + 1, Path: path, Available: bindings.Bound()}
			}
		}
	}
	return nil
}

// checkShell fails at the first line that would run a command of the system.
func checkShell(nb *Notebook) error {
	for i, c := range codeCells(nb) {
		special, _ := splitSpecial(c.Source)
		for _, line := range special {
			if strings.HasPrefix(line, "$") {
				return &ShellError{Cell: i + 1, Line: line}
			}
		}
	}
	return nil
}

// codeCells are the cells that count: the one that Run put in does not.
func codeCells(nb *Notebook) []*Cell {
	var out []*Cell
	for _, c := range nb.Cells {
		if c.Type == "code" && !c.HasTag(setTag) {
			out = append(out, c)
		}
	}
	return out
}

// splitSpecial cuts off the lines at the head of a cell that the kernel itself
// takes, which start with % or $. In the rest they are blank, so that line
// numbers stay.
func splitSpecial(source string) (special []string, rest string) {
	all := strings.Split(source, "\n")
	for i, l := range all {
		l = strings.TrimSpace(l)
		if l == "" {
			continue
		}
		if l[0] != '%' && l[0] != '$' {
			break
		}
		special = append(special, l)
		all[i] = ""
	}
	return special, strings.Join(all, "\n")
}

// importsOf lists the paths a cell imports. It reads tokens, as cells are
// statements and not files.
func importsOf(source string) []string {
	_, source = splitSpecial(source)
	var s scanner.Scanner
	files := token.NewFileSet()
	s.Init(files.AddFile("", files.Base(), len(source)), []byte(source), func(token.Position, string) {}, 0)
	var out []string
	inside, group := false, false
	for {
		_, tok, lit := s.Scan()
		switch {
		case tok == token.EOF:
			return out
		case tok == token.IMPORT:
			inside, group = true, false
		case !inside:
		case tok == token.LPAREN:
			group = true
		case tok == token.RPAREN, tok == token.SEMICOLON && !group:
			inside = false
		case tok == token.STRING:
			if path, err := strconv.Unquote(lit); err == nil {
				out = append(out, path)
			}
		}
	}
}
