package cif

import (
	"fmt"
	"strings"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const (
	longestName = 75
	longestLine = 2048
)

type parser struct {
	lexer
	file  *File
	block *Block // the open block or frame
	outer *Block // the block around an open frame
	tok   token
}

func parse(name string, src *text.Source) (*File, error) {
	defer src.Close()
	p := &parser{lexer: lexer{name: name, src: src, data: src.Bytes(), warned: map[string]bool{}}, file: &File{Name: name}}
	if err := p.begin(); err != nil {
		return nil, err
	}
	p.file.Version = p.version
	if err := p.run(); err != nil {
		return nil, err
	}
	if err := p.singles(); err != nil {
		return nil, err
	}
	p.file.data = p.data
	p.file.settle()
	p.longLines()
	p.repeatedBlocks()
	p.file.Warnings = p.warn
	p.file.embedded()
	return p.file, nil
}

// settle turns the spans of pairs into values once the text has its final place.
func (f *File) settle() {
	for _, b := range f.Blocks {
		for _, c := range append([]*Block{b}, b.Frames...) {
			for i := range c.Items {
				c.Items[i].Value = f.value(c.itemSpans[i])
			}
		}
	}
}

func (p *parser) advance() (err error) {
	p.tok, err = p.next()
	return err
}

func (p *parser) run() error {
	if err := p.advance(); err != nil {
		return err
	}
	for p.tok.kind != tokEnd {
		if p.block == nil && p.tok.kind != tokData {
			return p.fault(p.tok.at, "something stands before the first data_ heading: "+p.shown(), "begin the file with a heading such as data_thin")
		}
		if err := p.statement(); err != nil {
			return err
		}
	}
	if p.outer != nil {
		return p.fault(p.tok.at, "the save frame "+p.block.Code+" is not closed", "close it with save_")
	}
	return p.src.Err()
}

func (p *parser) statement() error {
	p.item = ""
	switch p.tok.kind {
	case tokData:
		return p.heading()
	case tokFrame:
		return p.openFrame()
	case tokFrameEnd:
		return p.closeFrame()
	case tokLoop:
		return p.loop()
	case tokName:
		return p.pair()
	}
	return p.fault(p.tok.at, "a value stands without a data name: "+p.shown(), "a data name takes one value; text of several words needs quotes")
}

func (p *parser) shown() string { return text.Shown(p.data[p.tok.at:min(p.i, len(p.data))]) }

func (p *parser) code() string { return string(p.data[p.tok.start:p.tok.end]) }

func (p *parser) heading() error {
	if p.outer != nil {
		return p.fault(p.tok.at, "a data_ heading stands inside the save frame "+p.block.Code, "close the frame with save_")
	}
	b := &Block{Code: p.code(), Position: len(p.file.Blocks) + 1, Line: text.Line(p.data, p.tok.at), file: p.file, names: map[string]place{}}
	p.limit("block code", b.Code)
	p.file.Blocks = append(p.file.Blocks, b)
	p.block, p.lexer.block = b, b.Code
	return p.advance()
}

func (p *parser) openFrame() error {
	if p.outer != nil {
		return p.fault(p.tok.at, "a save frame opens inside the save frame "+p.block.Code, "close the first with save_; frames cannot be nested")
	}
	f := &Block{Code: p.code(), Position: len(p.block.Frames) + 1, Line: text.Line(p.data, p.tok.at), file: p.file, names: map[string]place{}}
	for _, g := range p.block.Frames {
		if strings.EqualFold(g.Code, f.Code) {
			return p.fault(p.tok.at, "the save frame "+f.Code+" stands twice in its block", "rename one of them")
		}
	}
	p.block.Frames = append(p.block.Frames, f)
	p.outer, p.block = p.block, f
	return p.advance()
}

func (p *parser) closeFrame() error {
	if p.outer == nil {
		return p.fault(p.tok.at, "save_ closes a frame that is not open", "remove it, or put it in quotes if it is a value")
	}
	if len(p.block.names) == 0 {
		return p.fault(p.tok.at, "the save frame "+p.block.Code+" is empty", "remove it")
	}
	p.block, p.outer = p.outer, nil
	return p.advance()
}

func (p *parser) limit(what, name string) {
	if len(name) > longestName && p.version != "2.0" {
		p.warn = append(p.warn, intensity.Warning{Code: "long-name", Where: where(p.name, text.Line(p.data, p.tok.at)),
			Text: fmt.Sprintf("a %s has %d characters, CIF 1.1 allows %d: %s", what, len(name), longestName, name)})
	}
}

// declare enters the name of the current token into the block.
func (p *parser) declare(at place) (string, error) {
	name := p.code()
	if len(name) == 1 {
		return "", p.fault(p.tok.at, "a data name is only an underscore", "write the name in full")
	}
	key := strings.ToLower(name)
	if _, twice := p.block.names[key]; twice {
		p.item = name
		return "", p.fault(p.tok.at, "the data name stands twice in its block", "remove or rename one of them; case does not count")
	}
	p.block.names[key] = at
	p.limit("data name", name)
	return name, nil
}

func (p *parser) pair() error {
	name, err := p.declare(place{-1, len(p.block.Items)})
	if err != nil {
		return err
	}
	at := p.tok.at
	p.item = name
	if err := p.advance(); err != nil {
		return err
	}
	if p.tok.kind != tokValue {
		return p.fault(at, "the data name has no value", "write ? for a value that is not known")
	}
	p.block.Items = append(p.block.Items, Item{Name: name})
	p.block.itemSpans = append(p.block.itemSpans, p.tok.span)
	return p.advance()
}

func (p *parser) loop() error {
	at := p.tok.at
	l := &Loop{block: p.block}
	if err := p.advance(); err != nil {
		return err
	}
	for p.tok.kind == tokName {
		name, err := p.declare(place{len(p.block.Loops), len(l.Names)})
		if err != nil {
			return err
		}
		l.Names = append(l.Names, name)
		if err := p.advance(); err != nil {
			return err
		}
	}
	if len(l.Names) == 0 {
		return p.fault(at, "loop_ is not followed by a data name", "name the columns of the loop, or remove it")
	}
	p.item = l.Names[0]
	if p.tok.kind != tokValue {
		return p.fault(at, "the loop has no values", "give at least one row, or remove the loop")
	}
	p.block.Loops = append(p.block.Loops, l)
	if plan := planFor(l.Names); plan != nil && p.outer == nil {
		l.Reflections = true
		return p.reflections(l, plan)
	}
	for p.tok.kind == tokValue {
		l.spans = append(l.spans, p.tok.span)
		if err := p.advance(); err != nil {
			return err
		}
	}
	if len(l.spans)%len(l.Names) != 0 {
		return p.wrongCount(l, len(l.spans))
	}
	l.Rows = len(l.spans) / len(l.Names)
	return nil
}

func (p *parser) wrongCount(l *Loop, n int) error {
	p.item = l.Names[0]
	return p.fault(p.tok.at, fmt.Sprintf("the loop holds %d values for %d names: the last row has %d of %d", n, len(l.Names), n%len(l.Names), len(l.Names)),
		"complete the last row, or look for a value with a blank in it that needs quotes")
}

// longLines warns of lines over the limit, looking at only a few bytes of each.
func (p *parser) longLines() {
	d := p.data
	for i := 0; len(d)-i > longestLine; {
		j := lastLineEnd(d[i : i+longestLine+1])
		if j < 0 {
			p.once("long-line", fmt.Sprintf("a line is longer than the %d characters CIF 1.1 allows; it was read whole", longestLine), i)
			return
		}
		i += j + 1
	}
}

func lastLineEnd(d []byte) int {
	for i := len(d) - 1; i >= 0; i-- {
		if d[i] == '\n' || d[i] == '\r' {
			return i
		}
	}
	return -1
}

func (p *parser) repeatedBlocks() {
	first := map[string]*Block{}
	for _, b := range p.file.Blocks {
		key := strings.ToLower(b.Code)
		if a, ok := first[key]; ok {
			p.warn = append(p.warn, intensity.Warning{Code: "repeated-block", Where: where(p.name, b.Line),
				Text: fmt.Sprintf("the block code %s stands on line %d too; the blocks are kept apart by position: #%d and #%d", b.Code, a.Line, a.Position, b.Position)})
			continue
		}
		first[key] = b
	}
}
