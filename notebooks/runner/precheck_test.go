package runner

import (
	"context"
	"errors"
	"slices"
	"strings"
	"testing"
)

func TestImportsAreRefusedBeforeTheStart(t *testing.T) {
	started := false
	o := &Options{KernelPath: kernelPath, Progress: func(Event) { started = true }}
	res, err := Run(context.Background(), code("1", "import \"fmt\"", "x := 1\nimport (\n\t\"strings\"\n\ty \"example.org/x/y\"\n)"), o)
	var refused *ImportError
	if !errors.As(err, &refused) || res != nil || started {
		t.Fatalf("error %v, started %v", err, started)
	}
	if refused.Cell != 3 || refused.Path != "example.org/x/y" || !slices.Contains(refused.Available, "thinward/notebooks/session") {
		t.Errorf("%+v", refused)
	}
	if !strings.HasPrefix(err.Error(), "cell 3: package example.org/x/y is not in this kernel; available: ") {
		t.Errorf("text %q", err)
	}
}

func TestImportsOf(t *testing.T) {
	for _, c := range []struct {
		source string
		want   []string
	}{
		{"", nil},
		{`import "a"`, []string{"a"}},
		{"%cd x\nimport . `a`; import _ \"b\"\ns := \"import c\"", []string{"a", "b"}},
		{"import (\n\"a\" // import \"no\"\nb \"c/d\"\n)\nf(\"e\")", []string{"a", "c/d"}},
		{"x := `\nimport \"no\"`", nil},
		{"import", nil},
	} {
		if got := importsOf(c.source); !slices.Equal(got, c.want) {
			t.Errorf("%q: %q, want %q", c.source, got, c.want)
		}
	}
}

func TestShellLines(t *testing.T) {
	for _, source := range []string{"$echo hi", "\n%cd .\n  $ echo hi\n1"} {
		_, err := Run(context.Background(), code("1", source), &Options{KernelPath: kernelPath})
		var refused *ShellError
		if !errors.As(err, &refused) || refused.Cell != 2 || !strings.HasPrefix(refused.Line, "$") {
			t.Errorf("%q: %v", source, err)
		}
	}
	// A later line that starts with $ is no command: the interpreter refuses it.
	if err := checkShell(code("x := 1\n$echo hi")); err != nil {
		t.Error(err)
	}
	if got := must(t, Options{AllowShell: true}, "$echo hi"); !strings.Contains(got[0], "hi") {
		t.Errorf("allowed: %q", got)
	}
}
