package table

import (
	"context"
	"go/constant"
	"go/token"
	"go/types"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/notebooks/bindings/load"
)

func fixturePkg(t *testing.T) *types.Package {
	t.Helper()
	set, err := load.Packages(context.Background(), ".", fixturePackage)
	if err != nil {
		t.Fatal(err)
	}
	pkg, err := set.Import(fixturePackage)
	if err != nil {
		t.Fatal(err)
	}
	return pkg
}

func TestWriteBindsOnlyWhatIsWanted(t *testing.T) {
	text, err := Write(fixturePkg(t), &Directive{Names: map[string]bool{"Bump": true, "Sum": true}}, nil, "")
	if err != nil {
		t.Fatal(err)
	}
	s := string(text)
	if !strings.HasPrefix(s, Header+"\n") || !strings.Contains(s, `reflect.ValueOf(fixture.Bump)`) || !strings.Contains(s, "Sum (generic)") {
		t.Errorf("wrong table:\n%s", s)
	}
	if strings.Contains(s, "Wrappers") || strings.Contains(s, "Mixed") {
		t.Errorf("too much in the table:\n%s", s)
	}
	_, err = Write(fixturePkg(t), &Directive{Names: map[string]bool{"Nope": true}}, nil, "")
	if err == nil || !strings.Contains(err.Error(), "exports no Nope") {
		t.Errorf("unknown name: %v", err)
	}
}

func TestConstants(t *testing.T) {
	value := func(s string) constant.Value { return constant.MakeFromLiteral(s, token.INT, 0) }
	for _, c := range []struct{ literal, text, machine string }{
		{"5", "int:5", "p.C"},
		{"2147483648", "int:2147483648", "int64(p.C)"},
		{"9223372036854775808", "int:9223372036854775808", "uint64(p.C)"},
		{"18446744073709551616", "float:18446744073709551616", "float64(1.8446744073709552e+19)"},
	} {
		if got := untypedText(types.UntypedInt, value(c.literal)); got != c.text {
			t.Errorf("%s: text %q, want %q", c.literal, got, c.text)
		}
		if got := machineValue(types.UntypedInt, value(c.literal), "p.C"); got != c.machine {
			t.Errorf("%s: machine value %q, want %q", c.literal, got, c.machine)
		}
	}
}

func TestSaveRemovesOldTables(t *testing.T) {
	dir := t.TempDir()
	first := map[string][]byte{"tables/a/table.go": []byte("a"), "tables/b/table.go": []byte("b"), "list.go": []byte("l")}
	if err := Save(dir, first); err != nil {
		t.Fatal(err)
	}
	delete(first, "tables/a/table.go")
	if err := Save(dir, first); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(dir, "tables", "a")); !os.IsNotExist(err) {
		t.Errorf("tables/a is still there: %v", err)
	}
	if text, err := os.ReadFile(filepath.Join(dir, "tables", "b", "table.go")); err != nil || string(text) != "b" {
		t.Errorf("tables/b: %q, %v", text, err)
	}
}
