package nbcheck_test

import (
	"context"
	"fmt"
	"path/filepath"

	"thinward/notebooks/runner"
	"thinward/notebooks/runner/nbcheck"
)

// A call whose error nobody looks at is found without running anything.
func ExampleUnchecked() {
	nb := &runner.Notebook{Cells: []*runner.Cell{
		{Type: "code", Source: "import \"strconv\""},
		{Type: "code", Source: "strconv.Atoi(\"12\")"},
	}}
	found, err := nbcheck.Unchecked(context.Background(), filepath.Join("..", "..", ".."), nb)
	for _, f := range found {
		fmt.Println(f.Cell, f.Call)
	}
	fmt.Println(err)
	// Output:
	// 2 strconv.Atoi
	// <nil>
}
