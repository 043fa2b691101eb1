package runner

import "encoding/json"

// Notebook is a Jupyter notebook of format 4.
type Notebook struct {
	Cells    []*Cell
	Metadata map[string]json.RawMessage
	Minor    int // minor format number; cells carry an ID from 5 on
}

// Cell is one cell of a notebook.
type Cell struct {
	ID        string
	Type      string // code, markdown or raw
	Source    string
	Tags      []string
	Metadata  map[string]json.RawMessage // without tags
	Count     int                        // execution count; 0 when not run
	Outputs   []Output                   // of code cells
	extraKeys map[string]json.RawMessage
}

// Output is one output of a code cell.
type Output struct {
	Type      string                     // stream, display_data, execute_result or error
	Stream    string                     // stdout or stderr
	Text      string                     // of a stream
	Data      map[string]json.RawMessage // by MIME type; texts are JSON strings
	Metadata  map[string]json.RawMessage
	Count     int // of an execute_result
	Name      string
	Value     string
	Traceback []string
}
