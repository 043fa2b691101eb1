package cif

import (
	"strconv"
	"strings"
)

func where(file string, line int) string { return file + ":" + strconv.Itoa(line) }

// value makes the Value of a span: line ends become LF, folded text fields are
// unfolded, CIF 2.0 line prefixes removed.
func (f *File) value(s span) Value {
	v := Value{Kind: s.kind, Text: string(f.data[s.start:s.end]), offset: s.start}
	if s.kind != TextField && s.kind != Quoted {
		return v
	}
	if strings.IndexByte(v.Text, '\r') >= 0 {
		v.Text = strings.ReplaceAll(strings.ReplaceAll(v.Text, "\r\n", "\n"), "\r", "\n")
	}
	if s.kind == TextField {
		if f.Version == "2.0" {
			v.Text = unprefix(v.Text)
		}
		v.Text = unfold(v.Text)
	}
	return v
}

// unfold joins the lines of a text field that says by a first line of a single
// backslash that its lines are folded; any other text is returned as it is.
func unfold(s string) string {
	first, rest, ok := strings.Cut(s, "\n")
	if strings.TrimRight(first, " \t") != `\` {
		return s
	}
	if !ok {
		return ""
	}
	var out strings.Builder
	for {
		line, tail, more := strings.Cut(rest, "\n")
		if cut := strings.TrimRight(line, " \t"); strings.HasSuffix(cut, `\`) {
			out.WriteString(cut[:len(cut)-1])
		} else {
			out.WriteString(line)
			if more {
				out.WriteByte('\n')
			}
		}
		if !more {
			return out.String()
		}
		rest = tail
	}
}

// unprefix removes the line prefix of a CIF 2.0 text field: a first line of the
// prefix and one backslash (two when the rest is folded as well). A line that
// lacks the prefix means that none was meant.
func unprefix(s string) string {
	first, rest, ok := strings.Cut(s, "\n")
	mark := strings.TrimRight(first, " \t")
	prefix := strings.TrimRight(mark, `\`)
	slashes := len(mark) - len(prefix)
	if !ok || prefix == "" || slashes < 1 || slashes > 2 || strings.Contains(prefix, `\`) {
		return s
	}
	lines := strings.Split(rest, "\n")
	for i, line := range lines {
		if !strings.HasPrefix(line, prefix) {
			return s
		}
		lines[i] = line[len(prefix):]
	}
	if slashes == 2 {
		return "\\\n" + strings.Join(lines, "\n")
	}
	return strings.Join(lines, "\n")
}
