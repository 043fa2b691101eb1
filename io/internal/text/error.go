package text

import (
	"strconv"
	"strings"
)

// Error is one fault of an input file. File and Problem are always set; Line is
// 0 when the fault belongs to no line (a missing file, say), Block and Item are
// empty where the format has none. Remedy says what to do about it.
type Error struct {
	File    string
	Line    int
	Block   string
	Item    string
	Problem string
	Remedy  string
}

// Error joins the fields as "file:line: block b: item: problem; remedy".
func (e *Error) Error() string {
	var s strings.Builder
	s.WriteString(e.File)
	if e.Line > 0 {
		s.WriteString(":" + strconv.Itoa(e.Line))
	}
	if e.Block != "" {
		s.WriteString(": block " + e.Block)
	}
	if e.Item != "" {
		s.WriteString(": " + e.Item)
	}
	s.WriteString(": " + e.Problem)
	if e.Remedy != "" {
		s.WriteString("; " + e.Remedy)
	}
	return s.String()
}

// Line returns the line, from 1, that holds the byte at offset off. LF, CR LF and
// a lone CR each end a line. Offsets beyond the data count as its end.
func Line(data []byte, off int) int {
	if off > len(data) {
		off = len(data)
	}
	n := 1
	for i := 0; i < off; i++ {
		switch data[i] {
		case '\n':
			n++
		case '\r':
			if i+1 >= len(data) || data[i+1] != '\n' {
				n++
			}
		}
	}
	return n
}

// Shown returns data as it may stand in a message: at most 40 bytes, unprintable
// ones escaped, in quotes.
func Shown(data []byte) string {
	if len(data) > 40 {
		return strconv.QuoteToASCII(string(data[:37])) + "..."
	}
	return strconv.QuoteToASCII(string(data))
}
