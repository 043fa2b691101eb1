package page_test

import (
	"fmt"
	"strings"

	"thinward/notebooks/page"
	"thinward/notebooks/runner"
)

// An executed notebook becomes one file; what it holds of HTML is shown as text.
func ExampleBuild() {
	nb := &runner.Notebook{Minor: 5, Cells: []*runner.Cell{
		{ID: "a", Type: "markdown", Source: "# Which <b>positions</b> differ?"},
		{ID: "b", Type: "code", Source: "1 + 1", Count: 1, Outputs: []runner.Output{{Type: "stream", Stream: "stdout", Text: "2 < 3"}}},
	}}
	html, err := page.Build(nb, nil, page.Options{Series: "Tarn peptide", Command: "thinward run mine.ipynb"})
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, part := range []string{"<!doctype html>", "Content-Security-Policy", "2 &lt; 3", "thinward run mine.ipynb", "<script src"} {
		fmt.Println(part, strings.Contains(strings.ReplaceAll(string(html), "<!DOCTYPE", "<!doctype"), part))
	}
	// Output:
	// <!doctype html> true
	// Content-Security-Policy true
	// 2 &lt; 3 true
	// thinward run mine.ipynb true
	// <script src false
}
