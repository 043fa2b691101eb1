//go:build kernel

package bindings_test

import (
	"fmt"
	"go/build"
	"io"
	"reflect"
	"slices"
	"sort"
	"strings"
	"testing"

	interp "github.com/cosmos72/gomacro/fast"
	"github.com/cosmos72/gomacro/imports"

	"thinward/notebooks/bindings"
	"thinward/notebooks/bindings/fixture"
	_ "thinward/notebooks/bindings/fixture/table"
)

func newInterpreter(t testing.TB) *interp.Interp {
	t.Helper()
	build.Default.GOROOT = "/nonexistent-thinward"
	ir := interp.New()
	ir.Comp.Stdout, ir.Comp.Stderr = io.Discard, io.Discard
	return ir
}

// eval runs source and gives the last value, or the panic as an error.
func eval(ir *interp.Interp, source string) (v reflect.Value, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("%s: %v", source, r)
		}
	}()
	values, _ := ir.Eval(source)
	if len(values) == 0 {
		return reflect.Value{}, nil
	}
	return values[0].ReflectValue(), nil
}

// typeOf compiles an expression without running it.
func typeOf(ir *interp.Interp, source string) (typ reflect.Type, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("%s: %v", source, r)
		}
	}()
	return ir.Compile(source).Type.ReflectType(), nil
}

// ourTables are the tables this generator wrote, the fixture's among them.
func ourTables() []string {
	paths := append(bindings.Bound(), "thinward/notebooks/bindings/fixture",
		"errors", "fmt", "math", "os", "path/filepath", "sort", "strconv", "strings", "time")
	sort.Strings(paths)
	return paths
}

func TestEveryPackageOfTheListIsHeld(t *testing.T) {
	for _, path := range append(bindings.Bound(), bindings.Standard()...) {
		if _, ok := imports.Packages[path]; !ok {
			t.Errorf("%s is in the list and not in the interpreter", path)
		}
	}
	for path := range imports.Packages {
		first, _, _ := strings.Cut(path, "/")
		if !strings.Contains(first, ".") && path != "thinward/notebooks/bindings/fixture" && !bindings.Holds(path) {
			t.Errorf("%s is in the interpreter and not in the list", path)
		}
	}
}

func TestTablesHaveNoWrappers(t *testing.T) {
	for _, path := range ourTables() {
		if n := len(imports.Packages[path].Wrappers); n != 0 {
			t.Errorf("%s: %d wrappers", path, n)
		}
	}
}

// TestEveryMethodValue asks the interpreter for the value of every exported
// method of every bound type, by pointer and by value, and compares its type
// with what reflect says.
func TestEveryMethodValue(t *testing.T) {
	ir := newInterpreter(t)
	seen := 0
	for i, path := range ourTables() {
		alias := fmt.Sprintf("bound%d", i)
		if _, err := eval(ir, fmt.Sprintf("import %s %q", alias, path)); err != nil {
			t.Error(err)
			continue
		}
		for name, typ := range imports.Packages[path].Types {
			if typ.Kind() == reflect.Interface {
				continue
			}
			if typ.Kind() == reflect.Struct {
				seen += checkMethods(t, ir, fmt.Sprintf("new(%s.%s)", alias, name), reflect.New(typ))
			}
			variable := fmt.Sprintf("%s_%s", alias, name)
			if _, err := eval(ir, fmt.Sprintf("var %s %s.%s", variable, alias, name)); err != nil {
				t.Error(err)
				continue
			}
			of := reflect.New(typ)
			if isBasic(typ.Kind()) {
				// The interpreter keeps numbers and texts where they have no address, so
				// methods that want one cannot be called on them.
				of = of.Elem()
			}
			seen += checkMethods(t, ir, variable, of)
		}
	}
	t.Logf("%d method values", seen)
	if seen < 500 {
		t.Errorf("only %d method values were seen", seen)
	}
}

func isBasic(k reflect.Kind) bool {
	return k >= reflect.Bool && k <= reflect.Complex128 || k == reflect.String
}

// TestStandardMethodsWithoutWrappers does the same for the interpreter's own
// tables, which list promoted methods until DropWrappers empties the lists.
func TestStandardMethodsWithoutWrappers(t *testing.T) {
	bindings.DropWrappers()
	ir := newInterpreter(t)
	seen := 0
	for i, path := range bindings.Standard() {
		if path == "unsafe" || slices.Contains(ourTables(), path) {
			continue
		}
		// Its Func embeds a pointer to a type that holds Func again; the interpreter
		// refuses such methods with an error, wrappers or not.
		if path == "debug/gosym" {
			continue
		}
		alias := fmt.Sprintf("std%d", i)
		if _, err := eval(ir, fmt.Sprintf("import %s %q", alias, path)); err != nil {
			t.Error(err)
			continue
		}
		for name, typ := range imports.Packages[path].Types {
			if typ.Kind() == reflect.Struct {
				seen += checkMethods(t, ir, fmt.Sprintf("new(%s.%s)", alias, name), reflect.New(typ))
			}
		}
	}
	t.Logf("%d method values", seen)
	if seen < 1000 {
		t.Errorf("only %d method values were seen", seen)
	}
}

func checkMethods(t *testing.T, ir *interp.Interp, expr string, v reflect.Value) (seen int) {
	for i := range v.NumMethod() {
		name := v.Type().Method(i).Name
		want := v.Method(i).Type()
		got, err := typeOf(ir, expr+"."+name)
		if err != nil {
			t.Error(err)
			continue
		}
		if got != want {
			t.Errorf("%s.%s: the interpreter gives %v, reflect %v", expr, name, got, want)
			continue
		}
		seen++
		value, err := eval(ir, expr+"."+name)
		if err != nil {
			// A method promoted through a nil pointer has no value in Go either.
			if !strings.Contains(err.Error(), "nil pointer") {
				t.Error(err)
			}
			continue
		}
		if value.Type() != want {
			t.Errorf("%s.%s: its value has type %v, not %v", expr, name, value.Type(), want)
		}
	}
	return seen
}

func TestFixtureThroughTheInterpreter(t *testing.T) {
	m := fixture.NewMixed(4)
	number, word := m.Golf()
	cases := []struct {
		expr string
		want any
	}{
		{"fixture.NewMixed(4).Alpha()", m.Alpha()},
		{"fixture.NewMixed(4).Bravo()", m.Bravo()},
		{"fixture.NewMixed(4).Charlie()", m.Charlie()},
		{"fixture.NewMixed(4).Echo(\"abc\", 1, 2)", m.Echo("abc", 1, 2)},
		{"fixture.NewMixed(4).Foxtrot(9).Bravo()", 9.0},
		{"fixture.NewMixed(4).Hotel()", m.Hotel()},
		{"fixture.NewMixed(4).India()", m.India()},
		{"(*fixture.NewMixed(4)).India()", m.India()},
		{"fixture.NewMixed(4).Delta(3)", 7},
		{"fixture.NewMixed(4).N", 4},
		{"(&fixture.Base{2}).Delta(5)", 7},
		{"fixture.Base{2}.Alpha()", 3},
		{"fixture.IntPair{1, 2}.Swap().A", 2},
		{"fixture.Small", 7},
		{"fixture.Big / (1 << 30)", 1024},
		{"uint64(fixture.Biggest)", uint64(1<<64 - 1)},
		{"float64(fixture.TooBig)", float64(1 << 70)},
		{"float64(fixture.Third)", fixture.Third},
		{"string(fixture.Letter)", "x"},
		{"fixture.Word", fixture.Word},
		{"fixture.Yes", true},
		{"fixture.Blue.String()", "blue"},
		{"fixture.Describe(square{3})", "the square 9"},
	}
	ir := newInterpreter(t)
	for _, source := range []string{
		`import "thinward/notebooks/bindings/fixture"`,
		`type square struct { side float64 }`,
		`func (s square) Area() float64 { return s.side * s.side }`,
		`func (s square) Name(prefix string) string { return prefix + " square" }`,
	} {
		if _, err := eval(ir, source); err != nil {
			t.Fatal(err)
		}
	}
	for _, c := range cases {
		got, err := eval(ir, c.expr)
		if err != nil {
			t.Error(err)
			continue
		}
		if !reflect.DeepEqual(got.Interface(), c.want) {
			t.Errorf("%s = %v (%v), want %v (%T)", c.expr, got, got.Type(), c.want, c.want)
		}
	}
	if _, err := eval(ir, `g1, g2 := fixture.NewMixed(4).Golf()`); err != nil {
		t.Fatal(err)
	}
	g1, _ := eval(ir, "g1")
	g2, _ := eval(ir, "g2")
	if g1.Interface() != number || g2.Interface() != word {
		t.Errorf("Golf() = %v, %v, want %v, %v", g1, g2, number, word)
	}
}

func TestVariablesAreShared(t *testing.T) {
	ir := newInterpreter(t)
	for _, source := range []string{`import "thinward/notebooks/bindings/fixture"`, `fixture.Counter = 10`} {
		if _, err := eval(ir, source); err != nil {
			t.Fatal(err)
		}
	}
	if got := fixture.Bump(); got != 11 {
		t.Errorf("after the cell set 10, Bump gives %d", got)
	}
	if got, err := eval(ir, "fixture.Counter"); err != nil || got.Interface() != 11 {
		t.Errorf("after Bump the cell sees %v (%v)", got, err)
	}
}

func TestLeftOutNames(t *testing.T) {
	p := imports.Packages["thinward/notebooks/bindings/fixture"]
	for _, name := range []string{"Sum", "Pair", "Number", "Gone"} {
		_, bind := p.Binds[name]
		_, typ := p.Types[name]
		if bind || typ {
			t.Errorf("%s is bound", name)
		}
	}
	if _, ok := p.Proxies["Closed"]; ok {
		t.Error("Closed has a proxy")
	}
	if names := []string{"Closed", "Shape"}; !slices.ContainsFunc(names, func(n string) bool { return p.Types[n] == nil }) && p.Proxies["Shape"] == nil {
		t.Error("Shape has no proxy")
	}
}
