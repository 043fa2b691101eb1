package runner

import (
	"context"
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func declaring(source string) *Notebook {
	nb := code("1", source, "path", "[]interface{}{n, x, ok}")
	nb.Cells[1].Tags = []string{"parameters"}
	return nb
}

const declared = "path := \"a.toml\"\nvar n = -3\nx, ok := 0.5, true\nlist := []int{1}"

func TestParametersAreSet(t *testing.T) {
	set := map[string]string{"path": "b \"c\"\\.toml", "n": "0x10", "x": "2", "ok": "false"}
	res, err := Run(context.Background(), declaring(declared), &Options{KernelPath: kernelPath, Set: set})
	if err != nil {
		t.Fatal(err)
	}
	got := texts(res.Notebook)
	if diff := cmp.Diff([]string{"1", "", "", "b \"c\"\\.toml", "[16 2 false]"}, got); diff != "" {
		t.Errorf("outputs (-want +got):\n%s", diff)
	}
	if want := "n = 16\nok = false\npath = \"b \\\"c\\\"\\\\.toml\"\nx = 2.0"; res.Notebook.Cells[2].Source != want {
		t.Errorf("the cell put in is %q", res.Notebook.Cells[2].Source)
	}
	if diff := cmp.Diff(map[string]string{"path": `"a.toml"`, "n": "-3", "x": "0.5", "ok": "true"}, res.Default); diff != "" {
		t.Error(diff)
	}
	if res.Used["n"] != "16" || res.Cells != 4 || res.Ran != 4 {
		t.Errorf("result %+v", res)
	}
	again, err := Run(context.Background(), res.Notebook, &Options{KernelPath: kernelPath, Set: map[string]string{"n": "5"}})
	if err != nil || len(again.Notebook.Cells) != 5 || again.Notebook.Cells[2].Source != "n = 5" {
		t.Errorf("run again: %v", err)
	}
	back, err := Run(context.Background(), res.Notebook, &Options{KernelPath: kernelPath})
	if err != nil || len(back.Notebook.Cells) != 4 || back.Used["n"] != "-3" {
		t.Errorf("run without: %v", err)
	}
}

func TestParameterErrors(t *testing.T) {
	for _, c := range []struct{ name, value, reason, text string }{
		{"m", "1", "unknown", `the notebook has no parameter "m"; it declares n, ok, path, x`},
		{"list", "1", "not settable", `parameter list is []int{1} in the notebook, which --set cannot change: it sets text, numbers, true and false; change the notebook, or set another; it declares n, ok, path, x`},
		{"n", "1.5", "a whole number", `parameter n: "1.5" is not a whole number`},
		{"x", "NaN", "a number", `parameter x: "NaN" is not a number`},
		{"ok", "maybe", "true or false", `parameter ok: "maybe" is not true or false`},
	} {
		_, err := Run(context.Background(), declaring(declared), &Options{KernelPath: kernelPath, Set: map[string]string{c.name: c.value}})
		var refused *ParameterError
		if !errors.As(err, &refused) || refused.Name != c.name || refused.Value != c.value || refused.Reason != c.reason || err.Error() != c.text {
			t.Errorf("%s=%s: %v", c.name, c.value, err)
		}
	}
	_, err := Run(context.Background(), code("n := 1"), &Options{KernelPath: kernelPath, Set: map[string]string{"n": "2"}})
	if err == nil || !strings.Contains(err.Error(), "it declares none") {
		t.Errorf("no tagged cell: %v", err)
	}
	two := declaring(declared)
	two.Cells[0].Tags = []string{"parameters"}
	if _, err := Parameters(two); err == nil {
		t.Error("two tagged cells pass")
	}
	if _, err := Parameters(declaring("n := (")); err == nil {
		t.Error("a cell that does not parse passes")
	}
}

// Code must not come in through a value.
func TestParameterValuesStayValues(t *testing.T) {
	res, err := Run(context.Background(), declaring(declared), &Options{KernelPath: kernelPath, Set: map[string]string{"path": "\"; panic(\"out\"); \"\n`"}})
	if err != nil {
		t.Fatal(err)
	}
	if got := texts(res.Notebook)[3]; got != "\"; panic(\"out\"); \"\n`" {
		t.Errorf("the value became %q", got)
	}
}
