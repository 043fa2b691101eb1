package manifest

import (
	"bytes"
	"regexp"
	"strings"
)

// question is what Draft writes where files say nothing.
const question = "???"

// openQuestion is a key whose value is still the question, in quotes or without.
var openQuestion = regexp.MustCompile(`^\s*([A-Za-z0-9_.-]+)\s*=[\s\["']*\?\?\?["'\s\],]*(?:#.*)?$`)

// unanswered finds the first key of a draft that was not answered; nil where all are.
// Such a key is a fault of its own before the types are looked at: the question is text
// where a number belongs.
func unanswered(name string, data []byte) error {
	for i, line := range bytes.Split(data, []byte{'\n'}) {
		m := openQuestion.FindSubmatch(line)
		if m == nil {
			continue
		}
		key := string(m[1])
		return &Error{File: name, Line: i + 1, Key: key, Problem: question + " is not answered yet", Remedy: answerTo(key)}
	}
	return nil
}

func answerTo(key string) string {
	switch key[strings.LastIndex(key, ".")+1:] {
	case "title":
		return `say in quotes what the series is, such as title = "Tarn peptide, three wedges"`
	case "space_group":
		return `give the symbol in quotes, such as space_group = "P 21 21 21"`
	case "thickness_nm":
		return "give the thickness of this position in nanometres, without quotes, such as 140.0"
	case "a", "b", "c":
		return "give the edge of the cell in angstrom, without quotes, such as 24.1"
	}
	return "put the value in its place, or take the line out"
}
