package manifest

import (
	"bytes"
	"errors"
	"regexp"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

const seeReadme = "see the manifest section of the README"

// decodeError puts what the decoder of TOML says into words of the manifest. No type
// of ours or of Go stays in it.
func decodeError(name string, data []byte, err error) error {
	if looksLikeCIF(data) {
		return &Error{File: name, Problem: "this looks like a CIF, not like a manifest", Remedy: "write a manifest with thinward draft first, and give that", Err: err}
	}
	var strict *toml.StrictMissingError
	if errors.As(err, &strict) && len(strict.Errors) > 0 {
		first := &strict.Errors[0]
		line, _ := first.Position()
		key := strings.Join(first.Key(), ".")
		return &Error{File: name, Line: line, Key: key, Problem: "unknown key", Remedy: suggestion(first.Key()), Err: err}
	}
	var bad *toml.DecodeError
	if errors.As(err, &bad) {
		line, _ := bad.Position()
		problem, remedy := plainly(strings.TrimPrefix(bad.Error(), "toml: "))
		key := strings.Join(bad.Key(), ".")
		if key == "" {
			key = keyOn(data, line)
		}
		return &Error{File: name, Line: line, Key: key, Problem: problem, Remedy: remedy, Err: err}
	}
	problem, remedy := plainly(strings.TrimPrefix(err.Error(), "toml: "))
	return &Error{File: name, Problem: problem, Remedy: remedy, Err: err}
}

// keyOn returns the key that a line gives a value, "" where it gives none.
func keyOn(data []byte, line int) string {
	lines := bytes.Split(data, []byte{'\n'})
	if line < 1 || line > len(lines) {
		return ""
	}
	if m := keyLine.FindSubmatch(lines[line-1]); m != nil {
		return string(m[1])
	}
	return ""
}

var (
	keyLine = regexp.MustCompile(`^\s*([A-Za-z0-9_.-]+)\s*=`)
	// The three ways in which the decoder names a type.
	mismatch = regexp.MustCompile(`cannot decode TOML .+? into (?:struct field \S+ of type )?(\S+)$|cannot be stored in (\S+)$|cannot store an? .+ (?:in|into) (?:a |an )?(\S+)$`)
	goType   = regexp.MustCompile(`\b(?:(?:manifest|simulate)\.\w+|u?int\d*|float\d+|struct|reflect)\b`)
)

// plainly says what the decoder of TOML says in words of the manifest.
func plainly(problem string) (plain, remedy string) {
	if m := mismatch.FindStringSubmatch(problem); m != nil {
		return wanted(m[1] + m[2] + m[3])
	}
	switch {
	case goType.MatchString(problem):
		return "a value of another kind is wanted here", seeReadme
	case strings.Contains(problem, "U+002C ','"):
		return problem, "TOML has decimal points, and commas only inside lists"
	case strings.Contains(problem, "at start of value"), strings.Contains(problem, "expected keyword"), strings.Contains(problem, "strings must be quoted"),
		strings.Contains(problem, "expected 'nan'"), strings.Contains(problem, "expected 'inf'"), strings.Contains(problem, `expected "nan"`), strings.Contains(problem, `expected "inf"`):
		return "this value is neither a number nor text in quotes", `put text in quotes, such as name = "L1"`
	case strings.Contains(problem, "expected newline"):
		return "more stands on this line than one value", `put text in quotes, leave units out, and give each key a line of its own`
	case strings.Contains(problem, "invalid character"):
		return problem, "a manifest is text in TOML, as thinward draft FILES writes it; thinward peek shows what a reflection file holds"
	}
	return problem, seeReadme
}

// wanted says what a value of a type of ours is called in a manifest.
func wanted(goType string) (problem, remedy string) {
	switch goType {
	case "float64", "*float64":
		return "a number is wanted here", "write it without quotes, with a decimal point and without its unit, such as 140.0"
	case "uint64":
		return "must be a whole number from 0", "write it without quotes and without a decimal point, such as 1"
	case "int", "int32":
		return "must be a whole number", "write it without quotes and without a decimal point, such as 1"
	case "bool":
		return "must be true or false", "write one of the two, without quotes"
	case "string":
		return "a text is wanted here", "write it in double quotes"
	case "[]string":
		return "a list is wanted here", `write it in brackets, such as ["a", "b"]`
	case "[]int", "[]int32":
		return "a list of whole numbers is wanted here", "write it in brackets, such as [4, 5]"
	case "[2]float64", "[][2]float64":
		return "a list of pairs of numbers is wanted here", "write two levels of brackets, such as [[3.70, 3.64]]"
	case "[]float64":
		return "a list of numbers is wanted here", "write it in brackets, such as [1.0, 2.0]"
	case "[]manifest.Crystal", "[]manifest.Position", "[]manifest.Between", "slice":
		return "a table in double brackets is wanted here", "write [[crystal]], [[crystal.position]] or [[between]] on a line of its own and its keys below"
	}
	if strings.Contains(goType, ".") || goType == "struct" {
		return "a table is wanted here", "write its name in brackets on a line of its own, such as [cell], and its keys below"
	}
	return "a value of another kind is wanted here", seeReadme
}
