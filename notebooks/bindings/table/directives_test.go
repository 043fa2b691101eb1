package table

import (
	"slices"
	"strings"
	"testing"
)

func TestParseDirectives(t *testing.T) {
	all, err := ParseDirectives("# comment\na/... *\na/b One Two # more\n\tThree\n!a/c\nd * -Four\n")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		path, name string
		want       bool
	}{
		{"a", "X", true}, {"a/x/y", "X", true}, {"a/b", "One", true}, {"a/b", "Three", true}, {"a/b", "Four", false},
		{"d", "Four", false}, {"d", "Five", true},
	} {
		if got := directiveFor(all, c.path).wants(c.name); got != c.want {
			t.Errorf("%s.%s: %v", c.path, c.name, got)
		}
	}
	if d := directiveFor(all, "a/c"); d == nil || !d.Skip {
		t.Error("a/c is not left out")
	}
	if directiveFor(all, "ab") != nil || directiveFor(all, "d/e") != nil {
		t.Error("a pattern matches too much")
	}
	for _, bad := range []struct{ text, want string }{{" One", "goes on with nothing"}, {"a", "no names"}, {"a -One", "no names"}} {
		if _, err := ParseDirectives(bad.text); err == nil || !strings.Contains(err.Error(), bad.want) {
			t.Errorf("%q: %v", bad.text, err)
		}
	}
	d := Directive{Names: map[string]bool{"B": true, "A": true}, Not: map[string]bool{"C": true}}
	if got := d.unknown(map[string]bool{"B": true}); !slices.Equal(got, []string{"A", "C"}) {
		t.Errorf("unknown: %v", got)
	}
}
