package runner

import (
	"encoding/json"
	"fmt"
	"sort"
)

// ProgressMIME is the MIME type of display messages that carry progress; they
// are not outputs.
const ProgressMIME = "application/vnd.thinward.progress+json"

const (
	defaultCapStream = 1 << 20
	defaultCapValue  = 8 << 20
)

// collector gathers what one cell puts out.
type collector struct {
	cell      *Cell
	number    int
	capStream int
	capValue  int
	progress  func(Progress)

	kept, lost map[string]int // bytes of printed text, by stream
	cuts       []Cut
	failure    *failure
	clear      bool // clear the outputs before the next one
}

// failure is the content of an error message.
type failure struct {
	Name      string   `json:"ename"`
	Value     string   `json:"evalue"`
	Traceback []string `json:"traceback"`
	Detail    struct {
		Step   string `json:"step"`
		Remedy string `json:"remedy"`
		Inside bool   `json:"inside"`
	} `json:"thinward"`
}

func newCollector(cell *Cell, number int, o *Options, progress func(Progress)) *collector {
	c := &collector{cell: cell, number: number, capStream: o.CapStream, capValue: o.CapValue, progress: progress,
		kept: map[string]int{}, lost: map[string]int{}}
	if c.capStream <= 0 {
		c.capStream = defaultCapStream
	}
	if c.capValue <= 0 {
		c.capValue = defaultCapValue
	}
	cell.Outputs, cell.Count = nil, 0
	return c
}

// take adds a message of iopub. Contents that do not fit their type are dropped:
// the kernel is ours, and a broken output must not end the run.
func (c *collector) take(m message) {
	switch m.typ {
	case "execute_input":
		var in struct {
			Count int `json:"execution_count"`
		}
		if json.Unmarshal(m.content, &in) == nil {
			c.cell.Count = in.Count
		}
	case "stream":
		var s struct{ Name, Text string }
		if json.Unmarshal(m.content, &s) == nil {
			c.stream(s.Name, s.Text)
		}
	case "display_data", "execute_result":
		c.value(m)
	case "clear_output":
		var w struct{ Wait bool }
		if json.Unmarshal(m.content, &w) == nil && w.Wait {
			c.clear = true
		} else {
			c.cell.Outputs = nil
		}
	case "error":
		var f failure
		if json.Unmarshal(m.content, &f) == nil {
			c.failure = &f
			c.add(Output{Type: "error", Name: f.Name, Value: f.Value, Traceback: f.Traceback})
		}
	}
}

func (c *collector) add(o Output) {
	if c.clear {
		c.cell.Outputs, c.clear = nil, false
	}
	c.cell.Outputs = append(c.cell.Outputs, o)
}

func (c *collector) stream(name, text string) {
	if name != "stderr" {
		name = "stdout"
	}
	if room := c.capStream - c.kept["stdout"] - c.kept["stderr"]; len(text) > room {
		cut := wholeChars(text, room)
		c.lost[name] += len(text) - len(cut)
		text = cut
	}
	if text == "" {
		return
	}
	c.kept[name] += len(text)
	if n := len(c.cell.Outputs); n > 0 && !c.clear && c.cell.Outputs[n-1].Type == "stream" && c.cell.Outputs[n-1].Stream == name {
		c.cell.Outputs[n-1].Text += text
		return
	}
	c.add(Output{Type: "stream", Stream: name, Text: text})
}

// wholeChars gives at most n bytes of s, not cut inside a character.
func wholeChars(s string, n int) string {
	if n <= 0 {
		return ""
	}
	if n >= len(s) {
		return s
	}
	for n > 0 && s[n]&0xC0 == 0x80 {
		n--
	}
	return s[:n]
}

func (c *collector) value(m message) {
	var v struct {
		Data     map[string]json.RawMessage `json:"data"`
		Metadata map[string]json.RawMessage `json:"metadata"`
		Count    int                        `json:"execution_count"`
	}
	if json.Unmarshal(m.content, &v) != nil {
		return
	}
	if p, ok := v.Data[ProgressMIME]; ok {
		var progress Progress
		if json.Unmarshal(p, &progress) == nil {
			c.progress(progress)
		}
		delete(v.Data, ProgressMIME)
	}
	if len(v.Data) == 0 {
		return
	}
	var mimes []string
	for mime := range v.Data {
		mimes = append(mimes, mime)
	}
	sort.Strings(mimes)
	for _, mime := range mimes {
		n := len(v.Data[mime])
		if n <= c.capValue {
			continue
		}
		c.cuts = append(c.cuts, Cut{c.number, mime, n})
		delete(v.Data, mime)
		if _, ok := v.Data["text/plain"]; !ok {
			v.Data["text/plain"] = quote(fmt.Sprintf("(%s of %d bytes left out: a value may have %d)", mime, n, c.capValue))
		}
	}
	c.add(Output{Type: m.typ, Data: v.Data, Metadata: v.Metadata, Count: v.Count})
}

// finish says in the notebook what was left out of the printed text.
func (c *collector) finish() []Cut {
	for _, name := range []string{"stdout", "stderr"} {
		if c.lost[name] == 0 {
			continue
		}
		c.cuts = append(c.cuts, Cut{c.number, name, c.kept[name] + c.lost[name]})
		c.add(Output{Type: "stream", Stream: "stderr",
			Text: fmt.Sprintf("(%d more bytes on %s left out: a cell may print %d)\n", c.lost[name], name, c.capStream)})
	}
	return c.cuts
}
