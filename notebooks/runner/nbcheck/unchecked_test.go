package nbcheck

import (
	"context"
	"testing"

	"thinward/notebooks/runner"
)

func notebook(cells ...string) *runner.Notebook {
	nb := &runner.Notebook{Minor: 5}
	for _, c := range cells {
		nb.Cells = append(nb.Cells, &runner.Cell{Type: "markdown", Source: "Words."}, &runner.Cell{Type: "code", Source: c})
	}
	return nb
}

func TestUnchecked(t *testing.T) {
	const head = "import (\n\t\"os\"\n\t\"fmt\"\n\t\"strings\"\n\t\"thinward/notebooks/session\"\n)"
	for _, c := range []struct {
		name string
		cell string
		want []string
	}{
		{"dropped", `os.Remove("x")`, []string{"cell 2 line 1: os.Remove: its error is dropped"}},
		{"last value", "x := 1\nos.ReadFile(\"x\")", []string{"cell 2 line 2: os.ReadFile: its error is dropped"}},
		{"blank", `b, _ := os.ReadFile("x")`, []string{"cell 2 line 1: os.ReadFile: its error is dropped"}},
		{"not passed", "b, err := os.ReadFile(\"x\")\nif err != nil { b = nil }", []string{"cell 2 line 1: os.ReadFile: its error err is not passed to session.Check in the same cell"}},
		{"passed", "b, err := os.ReadFile(\"x\")\nsession.Check(err)\nlen(b)", nil},
		{"passed before only", "var err error\nsession.Check(err)\nerr = os.Remove(\"x\")", []string{"cell 2 line 3: os.Remove: its error err is not passed to session.Check in the same cell"}},
		{"passed directly", `session.Check(os.Remove("x"))`, nil},
		{"printing", `fmt.Println("x")`, nil},
		{"builder", "var b strings.Builder\nb.WriteString(\"x\")\nb.String()", nil},
		{"in a function", "func f() {\n\tos.Remove(\"x\")\n}", []string{"cell 2 line 2: os.Remove: its error is dropped"}},
		{"in a method", "type s struct{}\nfunc (v s) F() {\n\tos.Remove(\"x\")\n}", []string{"cell 2 line 3: os.Remove: its error is dropped"}},
		{"unknown method", "s := session.Context()\ns.Nope()", []string{"cell 2 line 2: s.Nope: it cannot be told what it returns"}},
		{"twice declared", "x := 5\nx := 6\nlen(fmt.Sprint(x))", nil},
		{"special line", "%cd /tmp\nos.Remove(\"x\")", []string{"cell 2 line 2: os.Remove: its error is dropped"}},
		{"deferred", "f := func() { defer os.Remove(\"x\") }\nf()", []string{"cell 2 line 1: os.Remove: its error is dropped"}},
		{"display", "import \"display\"\ndisplay.HTML(\"x\")", nil},
	} {
		t.Run(c.name, func(t *testing.T) {
			got, err := Unchecked(context.Background(), "../../..", notebook(head, c.cell))
			if err != nil {
				t.Fatal(err)
			}
			if len(got) != len(c.want) {
				t.Fatalf("found %v, want %v", got, c.want)
			}
			for i := range got {
				if got[i].String() != c.want[i] {
					t.Errorf("found %q, want %q", got[i], c.want[i])
				}
			}
		})
	}
}

func TestErrorInAnotherCellDoesNotCount(t *testing.T) {
	got, err := Unchecked(context.Background(), "../../..", notebook(
		"import \"os\"\nimport \"thinward/notebooks/session\"", `err := os.Remove("x")`, "session.Check(err)"))
	if err != nil {
		t.Fatal(err)
	}
	if len(got) != 1 || got[0].Cell != 2 {
		t.Errorf("found %v", got)
	}
}

func TestNotebookThatDoesNotParse(t *testing.T) {
	if _, err := Unchecked(context.Background(), "../../..", notebook("x := (")); err == nil {
		t.Error("no error")
	}
}
