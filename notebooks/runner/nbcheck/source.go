package nbcheck

import (
	"fmt"
	"go/scanner"
	"go/token"
	"sort"
	"strconv"
	"strings"

	"thinward/notebooks/runner"
)

// source makes one Go file of a notebook: the imports of all cells at its head,
// and one function with the cells one after the other, as the interpreter sees
// them. Functions and methods that a cell declares become function values.
func source(nb *runner.Notebook) (text string, imports []string) {
	var body strings.Builder
	seen := map[string]bool{}
	number := 0
	for _, c := range nb.Cells {
		if c.Type != "code" {
			continue
		}
		number++
		code, specs := rewrite(c.Source)
		for _, s := range specs {
			seen[s] = true
		}
		fmt.Fprintf(&body, "//line cell%d:1\n%s\n", number, code)
	}
	var head strings.Builder
	var specs []string
	for s := range seen {
		specs = append(specs, s)
	}
	sort.Strings(specs)
	for _, s := range specs {
		fmt.Fprintf(&head, "import %s\n", s)
		if path, err := strconv.Unquote(s[strings.IndexAny(s, "\"`"):]); err == nil {
			imports = append(imports, path)
		}
	}
	return "package notebook\n" + head.String() + "func _() {\n" + body.String() + "}\n", imports
}

type piece struct {
	at  int
	tok token.Token
	lit string
}

// rewrite blanks the special lines and imports of a cell and turns its function
// declarations into values. Line numbers stay. specs are the imports, with their
// name if they have one.
func rewrite(code string) (out string, specs []string) {
	code = blankSpecial(code)
	toks := tokens(code)
	edit := []byte(code)
	var replace []struct {
		from, to int
		with     string
	}
	depth := 0
	for i := 0; i < len(toks); i++ {
		switch t := toks[i]; t.tok {
		case token.LBRACE, token.LPAREN, token.LBRACK:
			depth++
		case token.RBRACE, token.RPAREN, token.RBRACK:
			depth--
		case token.IMPORT:
			end := i + 1
			if toks[end].tok == token.LPAREN {
				for end < len(toks)-1 && toks[end].tok != token.RPAREN {
					end++
				}
			}
			for end < len(toks)-1 && toks[end].tok != token.SEMICOLON {
				end++
			}
			specs = append(specs, specsOf(toks[i+1:end])...)
			for k := t.at; k < toks[end].at && k < len(edit); k++ {
				if edit[k] != '\n' {
					edit[k] = ' '
				}
			}
			i = end
		case token.FUNC:
			if depth > 0 || i > 0 && toks[i-1].tok != token.SEMICOLON && toks[i-1].tok != token.RBRACE {
				continue
			}
			from, to, with, ok := functionValue(toks[i:])
			if ok {
				replace = append(replace, struct {
					from, to int
					with     string
				}{from, to, with})
			}
		}
	}
	out = string(edit)
	for i := len(replace) - 1; i >= 0; i-- {
		r := replace[i]
		out = out[:r.from] + r.with + out[r.to:]
	}
	return out, specs
}

// functionValue turns "func name(" into "name := func(" and "func (r T) name("
// into "_ = func(r T, "; it gives the bytes to replace. Function literals are
// left alone.
func functionValue(toks []piece) (from, to int, with string, ok bool) {
	if len(toks) < 3 {
		return 0, 0, "", false
	}
	if toks[1].tok == token.IDENT && toks[2].tok == token.LPAREN {
		return toks[0].at, toks[2].at, toks[1].lit + " := func", true
	}
	if toks[1].tok != token.LPAREN {
		return 0, 0, "", false
	}
	end := 2
	for end < len(toks) && toks[end].tok != token.RPAREN {
		end++
	}
	if end+2 >= len(toks) || toks[end+1].tok != token.IDENT || toks[end+2].tok != token.LPAREN {
		return 0, 0, "", false
	}
	receiver := ""
	for _, t := range toks[2:end] {
		receiver += t.lit + " "
	}
	return toks[0].at, toks[end+2].at + 1, "_ = func(" + receiver + ", ", true
}

func specsOf(toks []piece) []string {
	var out []string
	name := ""
	for _, t := range toks {
		switch t.tok {
		case token.IDENT, token.PERIOD:
			name = t.lit + " "
		case token.STRING:
			out = append(out, name+t.lit)
			name = ""
		}
	}
	return out
}

func tokens(code string) []piece {
	var s scanner.Scanner
	files := token.NewFileSet()
	file := files.AddFile("", files.Base(), len(code))
	s.Init(file, []byte(code), func(token.Position, string) {}, 0)
	var out []piece
	for {
		pos, tok, lit := s.Scan()
		if lit == "" || tok.IsOperator() {
			lit = tok.String()
		}
		out = append(out, piece{min(file.Offset(pos), len(code)), tok, lit})
		if tok == token.EOF {
			return out
		}
	}
}

// blankSpecial empties the lines at the head of a cell that the kernel takes for
// itself.
func blankSpecial(code string) string {
	lines := strings.Split(code, "\n")
	for i, l := range lines {
		l = strings.TrimSpace(l)
		if l == "" {
			continue
		}
		if l[0] != '%' && l[0] != '$' {
			break
		}
		lines[i] = ""
	}
	return strings.Join(lines, "\n")
}
