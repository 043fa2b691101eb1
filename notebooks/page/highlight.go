package page

import (
	"go/scanner"
	"go/token"
	"html"
	"strings"
)

// highlight marks keywords, strings, numbers and comments of Go source. Text
// that is no Go is escaped and otherwise left as it is.
func highlight(source string) string {
	files := token.NewFileSet()
	file := files.AddFile("", files.Base(), len(source))
	var s scanner.Scanner
	s.Init(file, []byte(source), nil, scanner.ScanComments)
	var b strings.Builder
	at := 0
	for {
		pos, tok, lit := s.Scan()
		if tok == token.EOF {
			break
		}
		class := ""
		switch {
		case tok.IsKeyword():
			class = "k"
		case tok == token.STRING || tok == token.CHAR:
			class = "s"
		case tok == token.INT || tok == token.FLOAT || tok == token.IMAG:
			class = "n"
		case tok == token.COMMENT:
			class = "c"
		}
		start := file.Offset(pos)
		if class == "" || start < at || start+len(lit) > len(source) || source[start:start+len(lit)] != lit {
			continue
		}
		b.WriteString(html.EscapeString(source[at:start]))
		b.WriteString(`<span class="` + class + `">` + html.EscapeString(lit) + `</span>`)
		at = start + len(lit)
	}
	b.WriteString(html.EscapeString(source[at:]))
	return b.String()
}
