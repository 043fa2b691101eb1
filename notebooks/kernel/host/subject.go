package host

import (
	"go/scanner"
	"go/token"
)

// Subject gives the expression that a reader with the cursor at byte at asks
// about: the name there with what it is selected from, as "s.Study().Find" in
// "c := s.Study().Find(", or else the function whose arguments the cursor stands
// among. It is empty where there is none. Code that does not parse is no fault:
// the cell is being written.
func Subject(code string, at int) string {
	toks := scan(code)
	end := -1
	for i, t := range toks {
		if t.tok == token.IDENT && t.from <= at && at <= t.to {
			end = i
			break
		}
	}
	if end < 0 {
		end = calleeAt(toks, at)
	}
	if end < 0 {
		return ""
	}
	start := end
	for start >= 2 && toks[start-1].tok == token.PERIOD {
		before := operandStart(toks, start-2)
		if before < 0 {
			break
		}
		start = before
	}
	return code[toks[start].from:toks[end].to]
}

type located struct {
	tok      token.Token
	from, to int
}

func scan(code string) []located {
	var s scanner.Scanner
	files := token.NewFileSet()
	f := files.AddFile("", files.Base(), len(code))
	s.Init(f, []byte(code), func(token.Position, string) {}, 0)
	var out []located
	for {
		pos, tok, lit := s.Scan()
		if tok == token.EOF {
			return out
		}
		from, n := f.Offset(pos), len(lit)
		if tok.IsOperator() && tok != token.SEMICOLON {
			n = len(tok.String())
		}
		out = append(out, located{tok, from, min(from+n, len(code))})
	}
}

// calleeAt finds the last name before the innermost parenthesis that is open at
// the cursor.
func calleeAt(toks []located, at int) int {
	depth := 0
	for i := len(toks) - 1; i > 0; i-- {
		if toks[i].from >= at {
			continue
		}
		switch toks[i].tok {
		case token.RPAREN, token.RBRACE, token.RBRACK:
			depth++
		case token.LBRACE, token.LBRACK:
			if depth--; depth < 0 {
				return -1
			}
		case token.LPAREN:
			if depth--; depth < 0 {
				if toks[i-1].tok == token.IDENT {
					return i - 1
				}
				return -1
			}
		}
	}
	return -1
}

// operandStart gives the first token of the operand that ends at token i: a name,
// or a call or index of one; -1 when it is something else.
func operandStart(toks []located, i int) int {
	for depth := 0; i >= 0; i-- {
		switch toks[i].tok {
		case token.RPAREN, token.RBRACK, token.RBRACE:
			depth++
		case token.LPAREN, token.LBRACK, token.LBRACE:
			depth--
		case token.IDENT:
			if depth == 0 {
				return i
			}
		default:
			if depth == 0 {
				return -1
			}
		}
		if depth < 0 {
			return -1
		}
	}
	return -1
}
