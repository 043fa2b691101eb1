package session

import "thinward/analysis"

// Table is a table of one's own in a notebook: make it with NewTable, fill it
// with Add, and end the cell with it.
type Table struct {
	grid *grid
}

// NewTable makes an empty table with one heading a column. The first column holds
// the names of the rows.
func NewTable(caption string, heads ...string) *Table { return &Table{newGrid(caption, heads...)} }

// Words sets columns, counted from 0, to the left as text; others hold numbers.
func (t *Table) Words(columns ...int) *Table {
	t.grid.words(columns...)
	return t
}

// Add appends a row. Missing cells stay empty; it panics when there are more
// cells than columns.
func (t *Table) Add(cells ...string) *Table {
	if len(cells) > len(t.grid.head) {
		panic("session: Table.Add: more cells than columns")
	}
	for len(cells) < len(t.grid.head) {
		cells = append(cells, "")
	}
	t.grid.add(cells...)
	return t
}

// View gives the table as a view.
func (t *Table) View() *View { return t.grid.view(t.grid.caption) }

// SimpleRender shows the table at the end of a cell.
func (t *Table) SimpleRender() map[string]interface{} {
	if t == nil || t.grid == nil {
		return map[string]interface{}{"text/plain": ""}
	}
	return t.View().SimpleRender()
}

// Number writes v with the given decimals; not-a-number is a dash.
func Number(v float64, decimals int) string { return number(v, decimals) }

// Between writes an interval, "0.052 to 0.110".
func Between(lo, hi float64, decimals int) string { return between(lo, hi, decimals) }

// Count writes a whole number.
func Count(n int) string { return count(n) }

// Contrasts gives the numbers of every contrast, the primary one of each crystal
// first, to loop over.
func (s *Session) Contrasts() []analysis.ContrastResult { return s.upTo(stepDifferences).Contrasts }
