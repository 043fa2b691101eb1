package host

import "unicode/utf8"

// ByteOffset turns a cursor position in characters, as Jupyter counts since
// protocol 5.2, into one in bytes. Positions beyond the end give len(code),
// negative ones 0.
func ByteOffset(code string, chars int) int {
	n := 0
	for i := range code {
		if n >= chars {
			return i
		}
		n++
	}
	return len(code)
}

// CharOffset is the inverse of ByteOffset.
func CharOffset(code string, bytes int) int {
	return utf8.RuneCountInString(code[:max(0, min(bytes, len(code)))])
}
