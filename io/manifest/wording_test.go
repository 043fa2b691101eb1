package manifest

import (
	"errors"
	"regexp"
	"strings"
	"testing"
)

// foreign matches what a reader of an error should never meet: a type, or the decoder
// that stands behind a manifest.
var foreign = regexp.MustCompile(`\b(?:u?int(?:8|16|32|64)?|float(?:32|64)|string|bool|struct|slice|reflect|toml:|manifest\.[A-Z]\w*|decode|unmarshal)\b|\[\]`)

// tables matches the names of tables as a manifest writes them.
var tables = regexp.MustCompile(`\[\[[a-z.]+\]\]`)

// TestWording: whatever stands where a key of each kind wants something else is refused
// in words of the manifest, with the line and the key.
func TestWording(t *testing.T) {
	head := "title = \"x\"\n"
	tail := "[[crystal]]\nname = \"L1\"\n[[crystal.position]]\nname = \"thin\"\nthickness_nm = 100.0\nfiles = [\"thin.txt\"]\n"
	bodies := []struct{ key, before, kind string }{
		{"title", "", "text"},
		{"energy_keV", head, "number"},
		{"seed", head, "whole"},
		{"friedel_apart", head, "truth"},
		{"operators", head, "texts"},
		{"order", head + tail, "whole"},
		{"thickness_su_nm", head + tail, "number"},
		{"tilt_zero_deg", head + tail, "number"},
		{"block", head + tail, "text"},
		{"a", head + "[cell]\n", "number"},
		{"b", head + "[cell]\n", "number"},
		{"widths", head + "[columns]\n", "wholes"},
		{"exclude", head + tail, "table"},
		{"cell", head, "table"},
		{"primary", head, "table"},
		{"crystal", head, "tables"},
	}
	values := []struct {
		text string
		fits string // the kinds that take it
	}{
		{`"three"`, "text"}, {"3", "whole number"}, {"-3", "number whole"}, {"3.5", "number"}, {"true", "truth"},
		{`["a"]`, "texts"}, {"[1, 2]", "wholes"}, {"[1.5]", ""}, {"{ a = 1.0 }", "table"}, {"2026-01-01", ""}, {`"3.5"`, "text"}, {"C1", ""}, {"thin", ""}, {"nothing", ""}, {"140.0 nm", ""},
	}
	for _, b := range bodies {
		for _, v := range values {
			if strings.Contains(" "+v.fits+" ", " "+b.kind+" ") {
				continue
			}
			text := b.before + b.key + " = " + v.text + "\n"
			line := strings.Count(text, "\n")
			_, err := Parse("series", []byte(text))
			var e *Error
			if !errors.As(err, &e) {
				t.Errorf("%s = %s: %v", b.key, v.text, err)
				continue
			}
			if m := foreign.FindString(tables.ReplaceAllString(err.Error(), "")); m != "" {
				t.Errorf("%s = %s: %v\nsays %q", b.key, v.text, err, m)
			}
			if e.Line != line || e.Remedy == "" || !strings.Contains(e.Key, b.key) {
				t.Errorf("%s = %s: %v\nline %d, want %d and the key", b.key, v.text, err, e.Line, line)
			}
		}
	}
}

func TestWordingOf(t *testing.T) {
	for _, c := range []struct{ name, text, want string }{
		{"text for a whole number", "title = \"x\"\nseed = \"3\"\n", "series:2: seed: must be a whole number from 0; write it without quotes"},
		{"number with a point for a whole one", "title = \"x\"\nseed = 3.5\n", "series:2: seed: must be a whole number"},
		{"below 0", "title = \"x\"\nseed = -3\n", "series:2: seed: must be a whole number from 0"},
		{"number for text", "title = 3\n", "series:1: title: a text is wanted here; write it in double quotes"},
		{"no quotes", "[[crystal]]\nname = C1\n", `series:2: name: this value is neither a number nor text in quotes; put text in quotes, such as name = "L1"`},
		{"no quotes, a keyword's letter", "[[crystal]]\nname = thin\n", "put text in quotes"},
		{"no quotes, a digit first", "[[crystal]]\nname = 1a\n", "put text in quotes"},
		{"a table for text", "[title]\nname = \"L1\"\n", "a text is wanted here"},
		{"a text for tables", "crystal = \"L1\"\n", "write [[crystal]], [[crystal.position]] or [[between]]"},
		{"a CIF", "data_thin\n_cell_length_a 10\n", "series: this looks like a CIF, not like a manifest; write a manifest with thinward draft first"},
		{"a CIF behind a comment", "#\\#CIF_1.1\ndata_thin\n_cell_length_a 10\n", "this looks like a CIF"},
		{"a CIF that asks", "data_thin\n_cell_length_a ???\n", "this looks like a CIF"},
	} {
		_, err := Parse("series", []byte(c.text))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		} else if m := foreign.FindString(tables.ReplaceAllString(err.Error(), "")); m != "" {
			t.Errorf("%s: %v\nsays %q", c.name, err, m)
		}
	}
}

func TestUnanswered(t *testing.T) {
	for _, c := range []struct{ name, old, new, want string }{
		{"title", `"Two places"`, `"???"`, "series.toml:1: title: ??? is not answered yet; say in quotes what the series is"},
		{"group", `"P 21 21 21"`, `"???"   # the files do not say`, "series.toml:2: space_group: ??? is not answered yet; give the symbol"},
		{"thickness", "100.0", `"???"   # nanometres`, "series.toml:14: thickness_nm: ??? is not answered yet; give the thickness of this position in nanometres"},
		{"thickness without quotes", "100.0", "???", "series.toml:14: thickness_nm: ??? is not answered yet"},
		{"edge", "a = 10.0", `a = '???'`, "series.toml:5: a: ??? is not answered yet; give the edge"},
		{"in a list", `["thin.txt"]`, `["???"]`, "series.toml:15: files: ??? is not answered yet; put the value in its place"},
	} {
		_, err := Parse("series.toml", []byte(strings.Replace(good, c.old, c.new, 1)))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
	for _, text := range []string{
		strings.Replace(good, "seed = 3", "seed = 3   # ??? any", 1),
		strings.Replace(good, "Two places", "Two places ???", 1),
		"# energy_keV = ???\n" + good,
	} {
		if _, err := Parse("series.toml", []byte(text)); err != nil {
			t.Errorf("a question in a comment or within a text: %v", err)
		}
	}
}
