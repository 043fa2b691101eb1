package runner_test

import (
	"context"
	"fmt"

	"thinward/notebooks/kernel"
	"thinward/notebooks/runner"
)

// A notebook is run cell by cell in a kernel of its own; a value takes the place
// of what the cell tagged parameters declares.
func ExampleRun() {
	nb, err := runner.ParseNotebook([]byte(`{"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": [
		{"cell_type": "code", "id": "a", "metadata": {"tags": ["parameters"]}, "source": "n := 3"},
		{"cell_type": "code", "id": "b", "metadata": {}, "source": "n * 14"}]}`))
	if err != nil {
		fmt.Println(err)
		return
	}
	binary, err := kernel.Ensure(context.Background(), nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	res, err := runner.Run(context.Background(), nb, &runner.Options{KernelPath: binary, Set: map[string]string{"n": "10"}})
	if err != nil {
		fmt.Println(err)
		return
	}
	last := res.Notebook.Cells[len(res.Notebook.Cells)-1]
	fmt.Println(res.Ran, last.Outputs[0].PlainText(), res.Default["n"], res.Used["n"])
	// Output:
	// 2 140 3 10
}

func ExampleParameters() {
	nb := &runner.Notebook{Cells: []*runner.Cell{{Type: "code", Tags: []string{"parameters"}, Source: "series := \"mine.toml\"\nlong := false"}}}
	list, err := runner.Parameters(nb)
	for _, p := range list {
		fmt.Println(p.Name, p.Literal)
	}
	fmt.Println(err)
	// Output:
	// series "mine.toml"
	// long false
	// <nil>
}
