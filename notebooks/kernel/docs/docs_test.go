package docs

import (
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const sample = `// Package wide is a sample.
package wide

// Kinds of things.
const (
	Flat = iota // lies down
	Tall
	hidden
)

// Limit ends all.
var Limit, other = 3, 4

// Curve is a line.
type Curve struct {
	// N counts points.
	N int
	X, Y []float64 // both axes
	inner int
}

// New makes one.
func New(n int) *Curve { return nil }

// Len counts.
func (c *Curve) Len() int {
	return 0
}

func (c *Curve) unexported() {}

// Drawer draws.
type Drawer interface {
	// Draw draws once.
	Draw(times int) error
}
`

func extracted(t *testing.T) *Package {
	t.Helper()
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "wide.go"), []byte(sample), 0o600); err != nil {
		t.Fatal(err)
	}
	p, err := Extract("example/wide", dir, []string{"wide.go"})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func TestExtract(t *testing.T) {
	p := extracted(t)
	if p.Name != "wide" || p.Doc != "Package wide is a sample." {
		t.Errorf("%q, %q", p.Name, p.Doc)
	}
	curve := p.Entries["Curve"]
	curve.Decl = ""
	p.Entries["Curve"] = curve
	want := map[string]Entry{
		"Flat":        {"const Flat = iota", "lies down"},
		"Tall":        {"const Tall", "Kinds of things."},
		"Limit":       {"var Limit, _ = 3, 4", "Limit ends all."},
		"Curve":       {"", "Curve is a line."},
		"Curve.N":     {"field N int", "N counts points."},
		"Curve.X":     {"field X []float64", "both axes"},
		"Curve.Y":     {"field Y []float64", "both axes"},
		"Curve.Len":   {"func (c *Curve) Len() int", "Len counts."},
		"New":         {"func New(n int) *Curve", "New makes one."},
		"Drawer":      {p.Entries["Drawer"].Decl, "Drawer draws."},
		"Drawer.Draw": {"func Draw(times int) error", "Draw draws once."},
	}
	if diff := cmp.Diff(want, p.Entries); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
	if _, err := Extract("x", t.TempDir(), nil); err == nil {
		t.Error("no sources pass")
	}
	if _, err := Extract("x", t.TempDir(), []string{"none.go"}); err == nil {
		t.Error("a missing source passes")
	}
}

var entry = regexp.MustCompile(`(?m)^\t("(?:[^"\\]|\\.)*"): +("(?:[^"\\]|\\.)*"),$`)

func TestLibraryReadsWhatSourceWrites(t *testing.T) {
	p := extracted(t)
	text, err := Source(map[string]*Package{"example/wide": p, "example/empty": {Name: "empty"}})
	if err != nil {
		t.Fatal(err)
	}
	again, err := Source(map[string]*Package{"example/empty": {Name: "empty"}, "example/wide": p})
	if err != nil || string(again) != string(text) {
		t.Errorf("not the same bytes, %v", err)
	}
	tables := map[string]string{}
	for _, m := range entry.FindAllStringSubmatch(string(text), -1) {
		path, _ := strconv.Unquote(m[1])
		tables[path], _ = strconv.Unquote(m[2])
	}
	if len(tables) != 2 {
		t.Fatalf("%d tables in\n%s", len(tables), text)
	}
	tables["example/broken"] = "no table"
	l := NewLibrary(tables)
	if diff := cmp.Diff(p, l.Package("example/wide")); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
	if e, ok := l.Entry("example/wide", "New"); !ok || e.Text() != "func New(n int) *Curve\n\nNew makes one." {
		t.Errorf("%+v", e)
	}
	for _, c := range [][2]string{{"example/wide", "Nope"}, {"example/none", "New"}, {"example/broken", "New"}, {"", ""}} {
		if e, ok := l.Entry(c[0], c[1]); ok {
			t.Errorf("%v: %+v", c, e)
		}
	}
	want := "package wide // import \"example/wide\"\n\nPackage wide is a sample.\n\nCurve, Drawer, Flat, Limit, New, Tall"
	if got := l.Package("example/wide").Text("example/wide"); got != want {
		t.Error(got)
	}
}
