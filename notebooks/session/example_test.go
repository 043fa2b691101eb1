package session_test

import (
	"errors"
	"fmt"

	"thinward/notebooks/session"
)

// A table of one's own, for a check that the ledger does not have. In a notebook
// it is shown when it is the last value of a cell.
func ExampleNewTable() {
	t := session.NewTable("Order of measurement and exchange", "contrast", "thin was number", "m", "interval")
	t.Add("L1: thin − thick", session.Count(1), session.Number(0.0755, 3), session.Between(0.046, 0.105, 3))
	t.Add("L2: thin − thick", session.Count(2), session.Number(0.0913, 3), session.Between(0.063, 0.120, 3))
	fmt.Println(t.SimpleRender()["text/plain"])
	// Output:
	// Order of measurement and exchange
	// contrast          thin was number      m        interval
	// L1: thin − thick                1  0.075  0.046 to 0.105
	// L2: thin − thick                2  0.091  0.063 to 0.120
}

// Cells never see an error: Check ends the cell, and the run, with what went wrong
// and what to do about it.
func ExampleCheck() {
	defer func() { fmt.Println(recover()) }()
	session.Check(nil)
	session.Check(&session.Error{Step: "reading", Err: errors.New("no rows"), Remedy: "Look into the file with thinward peek."})
	// Output:
	// reading: no rows. Look into the file with thinward peek.
}
