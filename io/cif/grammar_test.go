package cif

import (
	"errors"
	"strings"
	"testing"
)

// The examples of a note on the CIF 1.1 and 2.0 grammar (International Tables for
// Crystallography, volume G, 2006, section 2.2.7; J. Appl. Cryst. (2016) 49,
// 277-284), by section, with what must be said about the invalid ones.
var grammarExamples = []struct {
	section, mark, text string
	line                int
	item                string
	problem             string
	remedy              string
}{
	{"1", "valid", `data_a
_t1
;first line
 ; not the end, there is a blank before
_looks_like_a_name 5
loop_
# not a comment
;
_t2 ;word
_t3 7
`, 0, "", "", ""},
	{"1", "valid", `data_a
loop_ _x _y
;1
; 2
3 4
`, 0, "", "", ""},
	{"1", "invalid", `data_a
_t1
;text
;_t2 5
`, 4, "_t1", "the ; that closes a text field is not followed by a blank", "put the next word on a line of its own"},
	{"1", "invalid", `data_a
_t1
;never closed
`, 3, "_t1", "a text field is not closed before the end of the file", "close it with ; as the first character of a line"},
	{"2", "valid", `data_a
_a 'don't stop'
_b "the "best"-known one"
_c '# no comment'
_d ''
_e '''
_f a'b"c
_g 'x' # comment
`, 0, "", "", ""},
	{"2", "invalid", `data_a
_a 'not closed
_b 1
`, 2, "_a", "a quoted string is not closed on its line", "close it with ' followed by a blank, or use a text field for text of several lines"},
	{"2", "invalid", `data_a
_a 'x'#glued
`, 2, "_a", "a quoted string is not closed on its line", "close it with ' followed by a blank, or use a text field for text of several lines"},
	{"2", "invalid", `data_a
_a 'so long as they don' t touch'
`, 2, "", `a value stands without a data name: "t"`, "a data name takes one value; text of several words needs quotes"},
	{"2", "invalid", `data_a
_b "the "best" one"
`, 2, "", `a value stands without a data name: "one\""`, "a data name takes one value; text of several words needs quotes"},
	{"3", "valid", `data_a
loop_ _i _s
1.0 0.1
? .
'?' "."
.5 ?x
`, 0, "", "", ""},
	{"4", "valid", `data_a
_a {x}
_b a[42]
_c a#b
_d <
_e \a
_f (1)
_g -
`, 0, "", "", ""},
	{"4", "invalid", `data_a
_a [x
`, 2, "_a", "an unquoted value begins with [", "put the value in quotes"},
	{"4", "invalid", `data_a
_a ]x
`, 2, "_a", "an unquoted value begins with ]", "put the value in quotes"},
	{"4", "invalid", `data_a
_a $x
`, 2, "_a", "an unquoted value begins with $", "put the value in quotes"},
	{"4", "invalid", `data_a
_a _b
`, 2, "_a", "the data name has no value", "write ? for a value that is not known"},
	{"5", "valid", `DATA_a
LOOP_ _X _y
1 2
_z loop_is_only_a_beginning
_w 'data_b'
`, 0, "", "", ""},
	{"5", "invalid", `data_a
_a stop_
`, 2, "_a", "the reserved word stop_ has no use in CIF", "put it in quotes if it is meant as a value"},
	{"5", "invalid", `data_a
_a global_
`, 2, "_a", "the reserved word global_ has no use in CIF", "put it in quotes if it is meant as a value"},
	{"5", "invalid", `data_a
_Cell 1
_cell 1
`, 3, "_cell", "the data name stands twice in its block", "remove or rename one of them; case does not count"},
	{"6", "valid", `data_a
loop_
_a # comment between names
_b
1 2 3
4
_c 5
`, 0, "", "", ""},
	{"6", "invalid", `data_a
loop_
_a _b
_c 1
`, 5, "_a", "the loop holds 1 values for 3 names: the last row has 1 of 3", "complete the last row, or look for a value with a blank in it that needs quotes"},
	{"6", "invalid", `data_a
loop_
_a _b
1 2 3
`, 5, "_a", "the loop holds 3 values for 2 names: the last row has 1 of 2", "complete the last row, or look for a value with a blank in it that needs quotes"},
	{"6", "invalid", `data_a
loop_
1 2
`, 2, "", "loop_ is not followed by a data name", "name the columns of the loop, or remove it"},
	{"6", "invalid", `data_a
loop_ loop_ _a 1
`, 2, "", "loop_ is not followed by a data name", "name the columns of the loop, or remove it"},
	{"6", "invalid", `data_a
loop_ _a _a
1 2
`, 2, "_a", "the data name stands twice in its block", "remove or rename one of them; case does not count"},
	{"6", "invalid", `data_a
_a 1 2
`, 2, "", `a value stands without a data name: "2"`, "a data name takes one value; text of several words needs quotes"},
	{"6", "invalid", `data_a
_a
_b 1
`, 2, "_a", "the data name has no value", "write ? for a value that is not known"},
	{"7", "valid", `# top
data_a # after heading
_a # between name and value
1
_b x#y
`, 0, "", "", ""},
	{"9", "valid", `   data_a _a 1 data_b _a 2
`, 0, "", "", ""},
	{"9", "invalid", `data_
_a 1
`, 1, "", "a data_ heading has no block code", "name the block, for example data_thin"},
	{"9", "invalid", `_a 1
`, 1, "", `something stands before the first data_ heading: "_a"`, "begin the file with a heading such as data_thin"},
	{"9", "invalid", `data_a
_a 1
data_A
_a 2
`, 0, "", "", ""},
	{"10", "valid", `data_a
_a 1
save_f
_a 2
save_
_b 3
`, 0, "", "", ""},
	{"10", "invalid", `data_a
save_f
_a 1
`, 4, "_a", "the save frame f is not closed", "close it with save_"},
	{"11", "valid", `data_a
loop_ _v
5 +5 -.5 5. 1.2E-3 12.34(5) 34.5(12) 3.45E1(12) 1.0e3(2)
`, 0, "", "", ""},
	{"12", "valid", `data_a
_t
;\
one \
line
;
`, 0, "", "", ""},
	{"13", "invalid", `#\#CIF_1.1
data_a
_a ['x' 'y']
`, 3, "_a", "an unquoted value begins with [", "put the value in quotes"},
	{"13", "cif2-valid", `#\#CIF_2.0
data_a
_l [1 2 [3 4]]
_t {'a':1 'b':'two'}
_q '''it's
two lines'''
_e []
`, 0, "", "", ""},
	{"13", "cif2-valid", `#\#CIF_2.0
data_a
_u 'angstrom: Å'
`, 0, "", "", ""},
	{"13", "cif2-invalid", `#\#CIF_2.0
data_a
_a 'don't'
`, 3, "_a", "a CIF 2.0 string holds its own quote mark", "use the other quote mark or triple quotes"},
	{"13", "cif2-invalid", `#\#CIF_2.0
data_a
_a a[42]
`, 3, "_a", `an unquoted CIF 2.0 value holds a bracket: "a[42]"`, "put the value in quotes"},
	{"13", "cif2-invalid", `#\#CIF_2.0
data_a
_a {k :1}
`, 3, "_a", "a key of a CIF 2.0 table is not quoted", "put it in quotes, with a colon directly behind"},
}

// accepted are the invalid examples that are read with a warning, since real files
// break the rule and nothing is in doubt.
var accepted = map[string]string{"data_a\n_a 1\ndata_A\n_a 2\n": "repeated-block"}

func TestGrammarExamples(t *testing.T) {
	for _, tt := range grammarExamples {
		f, err := Parse("f.cif", []byte(tt.text))
		code, warned := accepted[tt.text]
		valid := tt.mark == "valid" || tt.mark == "cif2-valid"
		switch {
		case warned:
			if err != nil || len(f.Warnings) != 1 || f.Warnings[0].Code != code {
				t.Errorf("section %s: %q: error %v, want a warning %s", tt.section, tt.text, err, code)
			}
		case valid:
			if err != nil {
				t.Errorf("section %s: %q: %v", tt.section, tt.text, err)
			}
		default:
			var e *Error
			if !errors.As(err, &e) {
				t.Errorf("section %s: %q: read, want an error", tt.section, tt.text)
				continue
			}
			if e.File != "f.cif" || e.Line != tt.line || e.Item != tt.item || e.Problem != tt.problem || e.Remedy != tt.remedy {
				t.Errorf("section %s: %q: got %d %q %q %q", tt.section, tt.text, e.Line, e.Item, e.Problem, e.Remedy)
			}
		}
	}
}

func TestGrammarSurvivesLineEnds(t *testing.T) {
	for _, end := range []string{"\r\n", "\r"} {
		for _, tt := range grammarExamples {
			_, want := Parse("f.cif", []byte(tt.text))
			_, got := Parse("f.cif", []byte(strings.ReplaceAll(tt.text, "\n", end)))
			if (want == nil) != (got == nil) || want != nil && want.Error() != got.Error() {
				t.Errorf("line end %q: %q: got %v, want %v", end, tt.text, got, want)
			}
		}
	}
}

func TestValuesOfExamples(t *testing.T) {
	for _, tt := range []struct {
		text string
		name string
		want []Value
	}{
		{"data_a\n_t1\n;first line\n ; not the end\n_x 5\n;\n", "_t1", []Value{{Kind: TextField, Text: "first line\n ; not the end\n_x 5"}}},
		{"data_a _t2 ;word", "_t2", []Value{{Kind: Word, Text: ";word"}}},
		{"data_a\n_t\n;  12 34\n   56\n\n;", "_t", []Value{{Kind: TextField, Text: "  12 34\n   56\n"}}},
		{"data_a\n_t\n; ?\n;\n", "_t", []Value{{Kind: TextField, Text: " ?"}}},
		{"data_a\r\n_t\r\n;a\r\nb\r\n;\r\n", "_t", []Value{{Kind: TextField, Text: "a\nb"}}},
		{"data_a\n_t\n;\n;\n", "_t", []Value{{Kind: TextField, Text: ""}}},
		{"data_a _a 'don't stop'", "_A", []Value{{Kind: Quoted, Text: "don't stop"}}},
		{"data_a _a '''", "_a", []Value{{Kind: Quoted, Text: "'"}}},
		{"data_a _a ''", "_a", []Value{{Kind: Quoted, Text: ""}}},
		{"data_a _a a'b\"c", "_a", []Value{{Kind: Word, Text: "a'b\"c"}}},
		{"data_a _a a#b", "_a", []Value{{Kind: Word, Text: "a#b"}}},
		{"data_a loop_ _i ? . '?' \".\" .5 ?x", "_i", []Value{{Kind: Unknown, Text: "?"}, {Kind: Inapplicable, Text: "."},
			{Kind: Quoted, Text: "?"}, {Kind: Quoted, Text: "."}, {Kind: Word, Text: ".5"}, {Kind: Word, Text: "?x"}}},
		{"data_a\nloop_ _x _y\n;1\n; 2\n3 4\n", "_x", []Value{{Kind: TextField, Text: "1"}, {Kind: Word, Text: "3"}}},
		{"data_a\n_t\n;\\\none \\\nline\n;\n", "_t", []Value{{Kind: TextField, Text: "one line"}}},
		{"data_a\n_t\n;one \\\nline\n;\n", "_t", []Value{{Kind: TextField, Text: "one \\\nline"}}},
		{"#\\#CIF_2.0\ndata_a _q '''it's\ntwo lines'''", "_q", []Value{{Kind: Quoted, Text: "it's\ntwo lines"}}},
		{"#\\#CIF_2.0\ndata_a _u 'angstrom: Å'", "_u", []Value{{Kind: Quoted, Text: "angstrom: Å"}}},
		{"#\\#CIF_2.0\ndata_a _p\n;> \\\n> ;one\n> two\n;\n", "_p", []Value{{Kind: TextField, Text: ";one\ntwo"}}},
		{"#\\#CIF_2.0\ndata_a _l [1 2 [3 4]]", "_l", []Value{{Kind: Compound, Text: "[1 2 [3 4]]"}}},
		{"#\\#CIF_2.0\ndata_a loop_ _l {'a':1 \"b]\":[]} [ # ]\n ']' ]", "_l", []Value{{Kind: Compound, Text: "{'a':1 \"b]\":[]}"}, {Kind: Compound, Text: "[ # ]\n ']' ]"}}},
		{"data_a _a 1 save_f _a 2 save_ _b 3", "_a", []Value{{Kind: Word, Text: "1"}}},
	} {
		f, err := Parse("f.cif", []byte(tt.text))
		if err != nil {
			t.Errorf("%q: %v", tt.text, err)
			continue
		}
		got := f.Blocks[0].Values(tt.name)
		if len(got) != len(tt.want) {
			t.Errorf("%q: %d values, want %d", tt.text, len(got), len(tt.want))
			continue
		}
		for i := range got {
			if got[i].Kind != tt.want[i].Kind || got[i].Text != tt.want[i].Text {
				t.Errorf("%q: value %d is %d %q, want %d %q", tt.text, i, got[i].Kind, got[i].Text, tt.want[i].Kind, tt.want[i].Text)
			}
		}
	}
}

func TestFramesKeepTheirNamesApart(t *testing.T) {
	f, err := Parse("f.cif", []byte("data_a _a 1 save_f _a 2 save_ _b 3"))
	if err != nil {
		t.Fatal(err)
	}
	b := f.Blocks[0]
	if len(b.Frames) != 1 || b.Frames[0].Code != "f" || b.Frames[0].Values("_a")[0].Text != "2" || !b.Has("_B") || b.Frames[0].Has("_b") {
		t.Errorf("frames %+v", b.Frames)
	}
}

func TestTolerated(t *testing.T) {
	for _, tt := range []struct{ text, code string }{
		{"\xef\xbb\xbfdata_a _a 1\n", "byte-order-mark"},
		{"# caf\xe9\ndata_a _a 1\n", "comment-characters"},
		{"data_a _a 1\n\x1a", "control-z"},
		{"data_a _a 1\x1a", "control-z"},
		{"data_a _a 'x'\x1a", "control-z"},
		{"data_a _a\n;x\n;\x1a", "control-z"},
		{"data_a _a " + strings.Repeat("x", 3000) + "\n", "long-line"},
		{"data_a _a 1 data_A _a 1", "repeated-block"},
		{"data_" + strings.Repeat("x", 76) + " _a 1", "long-name"},
		{"data_a _" + strings.Repeat("x", 75) + " 1", "long-name"},
	} {
		f, err := Parse("f.cif", []byte(tt.text))
		if err != nil {
			t.Errorf("%s: %v", tt.code, err)
			continue
		}
		if len(f.Warnings) != 1 || f.Warnings[0].Code != tt.code || !strings.HasPrefix(f.Warnings[0].Where, "f.cif:") {
			t.Errorf("%s: warnings %v", tt.code, f.Warnings)
		}
	}
	for _, quiet := range []string{"", "# only a comment", "data_a", "data_a _a " + strings.Repeat("x", 2038) + "\n", "data_a _" + strings.Repeat("x", 74) + " 1"} {
		if f, err := Parse("f.cif", []byte(quiet)); err != nil || len(f.Warnings) != 0 {
			t.Errorf("%.20q: %v, %v", quiet, err, f)
		}
	}
}
