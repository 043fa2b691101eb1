package runner

import (
	"bytes"
	"encoding/json"
	"fmt"
	"maps"
	"os"
	"slices"
	"strings"
)

// Notebook is a Jupyter notebook of format 4.
type Notebook struct {
	Cells    []*Cell
	Metadata map[string]json.RawMessage
	Minor    int // minor format number; cells carry an ID from 5 on
}

// Cell is one cell of a notebook.
type Cell struct {
	ID       string
	Type     string // code, markdown or raw
	Source   string
	Tags     []string
	Metadata map[string]json.RawMessage // without tags
	Count    int                        // execution count; 0 when not run
	Outputs  []Output                   // of code cells

	other map[string]json.RawMessage // keys we have no field for, such as attachments
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

// PlainText gives the text/plain form of a shown value, the text of a stream or
// the message of an error; empty if there is none.
func (o *Output) PlainText() string {
	switch o.Type {
	case "stream":
		return o.Text
	case "error":
		return o.Name + ": " + o.Value
	}
	return o.TextOf("text/plain")
}

// TextOf gives the value of a MIME type that is a text; empty if there is none.
func (o *Output) TextOf(mime string) string {
	var s string
	if json.Unmarshal(o.Data[mime], &s) != nil {
		return ""
	}
	return s
}

// HasTag tells whether the cell carries the tag.
func (c *Cell) HasTag(tag string) bool { return slices.Contains(c.Tags, tag) }

// ReadNotebook reads a notebook file.
func ReadNotebook(path string) (*Notebook, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	nb, err := ParseNotebook(text)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return nb, nil
}

type rawNotebook struct {
	Cells    []map[string]json.RawMessage `json:"cells"`
	Metadata map[string]json.RawMessage   `json:"metadata"`
	Format   int                          `json:"nbformat"`
	Minor    int                          `json:"nbformat_minor"`
}

// ParseNotebook reads a notebook. Formats other than 4 are errors, and so are
// cells and outputs of unknown types.
func ParseNotebook(text []byte) (*Notebook, error) {
	var raw rawNotebook
	if err := json.Unmarshal(text, &raw); err != nil {
		return nil, fmt.Errorf("no notebook: %w", err)
	}
	if raw.Format != 4 {
		return nil, fmt.Errorf("notebook of format %d, not 4; open and save it in Jupyter", raw.Format)
	}
	nb := &Notebook{Metadata: raw.Metadata, Minor: raw.Minor}
	for i, rc := range raw.Cells {
		c, err := parseCell(rc)
		if err != nil {
			return nil, fmt.Errorf("cell %d of the file: %w", i+1, err)
		}
		nb.Cells = append(nb.Cells, c)
	}
	return nb, nil
}

func parseCell(raw map[string]json.RawMessage) (*Cell, error) {
	c := &Cell{}
	var source lines
	var meta map[string]json.RawMessage
	var count *int
	var outputs []map[string]json.RawMessage
	for key, to := range map[string]any{"id": &c.ID, "cell_type": &c.Type, "source": &source, "metadata": &meta,
		"execution_count": &count, "outputs": &outputs} {
		if err := field(raw, key, to); err != nil {
			return nil, err
		}
	}
	switch c.Type {
	case "code", "markdown", "raw":
	default:
		return nil, fmt.Errorf("unknown type %q", c.Type)
	}
	c.Source = string(source)
	if err := field(meta, "tags", &c.Tags); err != nil {
		return nil, err
	}
	c.Metadata = without(meta, "tags")
	if count != nil {
		c.Count = *count
	}
	for _, ro := range outputs {
		o, err := parseOutput(ro)
		if err != nil {
			return nil, err
		}
		c.Outputs = append(c.Outputs, o)
	}
	c.other = without(raw, "id", "cell_type", "source", "metadata", "execution_count", "outputs")
	return c, nil
}

func parseOutput(raw map[string]json.RawMessage) (Output, error) {
	var o Output
	var text lines
	var count *int
	var data map[string]json.RawMessage
	for key, to := range map[string]any{"output_type": &o.Type, "text": &text, "data": &data, "metadata": &o.Metadata,
		"execution_count": &count, "ename": &o.Name, "evalue": &o.Value, "traceback": &o.Traceback} {
		if err := field(raw, key, to); err != nil {
			return o, err
		}
	}
	switch o.Type {
	case "stream":
		if err := field(raw, "name", &o.Stream); err != nil {
			return o, err
		}
		o.Text = string(text)
	case "display_data", "execute_result", "error":
	default:
		return o, fmt.Errorf("unknown output type %q", o.Type)
	}
	if count != nil {
		o.Count = *count
	}
	for mime, v := range data {
		if o.Data == nil {
			o.Data = map[string]json.RawMessage{}
		}
		var joined lines
		if isText(mime) && json.Unmarshal(v, &joined) == nil {
			v = quote(string(joined))
		}
		o.Data[mime] = v
	}
	return o, nil
}

func field(raw map[string]json.RawMessage, key string, to any) error {
	v, ok := raw[key]
	if !ok {
		return nil
	}
	if err := json.Unmarshal(v, to); err != nil {
		return fmt.Errorf("key %s: %w", key, err)
	}
	return nil
}

func without(m map[string]json.RawMessage, keys ...string) map[string]json.RawMessage {
	rest := maps.Clone(m)
	for _, k := range keys {
		delete(rest, k)
	}
	if len(rest) == 0 {
		return nil
	}
	return rest
}

// lines is a text that the file may hold as one string or as a list of lines.
type lines string

// UnmarshalJSON takes both forms.
func (l *lines) UnmarshalJSON(text []byte) error {
	var one string
	if err := json.Unmarshal(text, &one); err == nil {
		*l = lines(one)
		return nil
	}
	var many []string
	if err := json.Unmarshal(text, &many); err != nil {
		return err
	}
	*l = lines(strings.Join(many, ""))
	return nil
}

// isText tells whether the value of a MIME type is a text that the file holds as
// a list of lines.
func isText(mime string) bool {
	return strings.HasPrefix(mime, "text/") || mime == "image/svg+xml" || mime == "application/javascript"
}

// Bytes gives the notebook as a file: keys sorted, one space a level, texts as
// lists of lines, a line end last; the same notebook gives the same bytes.
func (nb *Notebook) Bytes() ([]byte, error) {
	cells := []any{}
	for _, c := range nb.Cells {
		cells = append(cells, c.file(nb.Minor))
	}
	meta := nb.Metadata
	if meta == nil {
		meta = map[string]json.RawMessage{}
	}
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	enc.SetIndent("", " ")
	err := enc.Encode(map[string]any{"cells": cells, "metadata": meta, "nbformat": 4, "nbformat_minor": nb.Minor})
	return b.Bytes(), err
}

func (c *Cell) file(minor int) map[string]any {
	m := map[string]any{"cell_type": c.Type, "source": split(c.Source)}
	for k, v := range c.other {
		m[k] = v
	}
	if minor >= 5 && c.ID != "" {
		m["id"] = c.ID
	}
	meta := map[string]any{}
	for k, v := range c.Metadata {
		meta[k] = v
	}
	if len(c.Tags) > 0 {
		meta["tags"] = c.Tags
	}
	m["metadata"] = meta
	if c.Type != "code" {
		return m
	}
	m["execution_count"] = orNull(c.Count)
	outputs := []any{}
	for i := range c.Outputs {
		outputs = append(outputs, c.Outputs[i].file())
	}
	m["outputs"] = outputs
	return m
}

func (o *Output) file() map[string]any {
	m := map[string]any{"output_type": o.Type}
	switch o.Type {
	case "stream":
		m["name"], m["text"] = o.Stream, split(o.Text)
		return m
	case "error":
		trace := o.Traceback
		if trace == nil {
			trace = []string{}
		}
		m["ename"], m["evalue"], m["traceback"] = o.Name, o.Value, trace
		return m
	case "execute_result":
		m["execution_count"] = orNull(o.Count)
	}
	data := map[string]any{}
	for mime, v := range o.Data {
		var s string
		if isText(mime) && json.Unmarshal(v, &s) == nil {
			data[mime] = split(s)
		} else {
			data[mime] = v
		}
	}
	meta := o.Metadata
	if meta == nil {
		meta = map[string]json.RawMessage{}
	}
	m["data"], m["metadata"] = data, meta
	return m
}

// split cuts behind each line end; no text is no lines.
func split(s string) []string {
	parts := strings.SplitAfter(s, "\n")
	if parts[len(parts)-1] == "" {
		parts = parts[:len(parts)-1]
	}
	return parts
}

func orNull(n int) any {
	if n == 0 {
		return nil
	}
	return n
}

func quote(s string) json.RawMessage {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	// A string always encodes.
	_ = enc.Encode(s)
	return bytes.TrimSuffix(b.Bytes(), []byte("\n"))
}

// Clone gives a copy that shares nothing that Run changes.
func (nb *Notebook) Clone() *Notebook {
	c := *nb
	c.Cells = nil
	for _, cell := range nb.Cells {
		one := *cell
		one.Tags = slices.Clone(cell.Tags)
		one.Metadata = maps.Clone(cell.Metadata)
		one.Outputs = slices.Clone(cell.Outputs)
		c.Cells = append(c.Cells, &one)
	}
	c.Metadata = maps.Clone(nb.Metadata)
	return &c
}

// Strip removes all outputs and counts, as notebooks are kept in version control.
func (nb *Notebook) Strip() {
	for _, c := range nb.Cells {
		c.Outputs, c.Count = nil, 0
	}
}
