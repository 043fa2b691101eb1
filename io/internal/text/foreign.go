package text

import "bytes"

// foreignStarts are the first bytes of files that people take for a list.
var foreignStarts = []struct{ start, problem, remedy string }{
	{"\xff\xfe", "the file is UTF-16 text", "save it as plain ASCII or UTF-8"},
	{"\xfe\xff", "the file is UTF-16 text", "save it as plain ASCII or UTF-8"},
	{"PK\x03\x04", "the file is a zip archive", "unpack it first; only gzip is read directly"},
	{"BZh", "the file is packed with bzip2", "unpack it first; only gzip is read directly"},
	{"\xfd7zXZ\x00", "the file is packed with xz", "unpack it first; only gzip is read directly"},
	{"\x28\xb5\x2f\xfd", "the file is packed with zstd", "unpack it first; only gzip is read directly"},
	{"\x1f\x9d", "the file is packed with compress", "unpack it first; only gzip is read directly"},
	{"%PDF-", "the file is a PDF document", "supply the list itself as text"},
}

// Foreign looks at the first bytes of a text, at least 16 where it has as many, and
// says what kind of file it is when it cannot be a list; "" otherwise.
func Foreign(d []byte) (problem, remedy string) {
	for _, f := range foreignStarts {
		if bytes.HasPrefix(d, []byte(f.start)) {
			return f.problem, f.remedy
		}
	}
	if len(d) >= 4 && (d[0] == 0 && d[2] == 0 && d[1] != 0 && d[3] != 0 || d[1] == 0 && d[3] == 0 && d[0] != 0 && d[2] != 0) {
		return "the file is UTF-16 text without a byte-order mark", "save it as plain ASCII or UTF-8"
	}
	low := bytes.ToLower(bytes.TrimLeft(d[:min(len(d), 16)], " \t\r\n"))
	if bytes.HasPrefix(low, []byte("<!doctype")) || bytes.HasPrefix(low, []byte("<html")) {
		return "the file is a web page", "download the list itself, not the page about it"
	}
	return "", ""
}
