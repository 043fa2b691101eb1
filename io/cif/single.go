package cif

import (
	"sort"
	"strings"
)

// singles makes lists of one row of reflection categories written as plain pairs of
// name and value, as any category of one row may be.
func (p *parser) singles() error {
	for _, b := range p.file.Blocks {
		for c := range categories {
			if err := p.single(b, categories[c].name); err != nil {
				return err
			}
		}
	}
	lists := p.file.lists
	sort.SliceStable(lists, func(i, j int) bool { return lists[i].marks[0] < lists[j].marks[0] })
	return nil
}

func (p *parser) single(b *Block, category string) error {
	var names []string
	var spans []span
	for i, item := range b.Items {
		rest, ok := strings.CutPrefix(strings.ToLower(item.Name), category)
		if ok && len(rest) > 1 && (rest[0] == '_' || rest[0] == '.') {
			names, spans = append(names, item.Name), append(spans, b.itemSpans[i])
		}
	}
	plan := planFor(names)
	if plan == nil {
		return nil
	}
	l := &list{file: p.file, block: b, plan: plan, names: names, twinRow: -1}
	l.grow(1)
	p.lexer.block = b.Code
	for c, s := range spans {
		at := s.start
		if s.kind == Quoted || s.kind == TextField {
			at--
		}
		if c == 0 {
			l.marks = []int{at}
		}
		if err := p.slowly(l, 0, c, token{kind: tokValue, span: s, at: at}); err != nil {
			return err
		}
	}
	l.finish(1)
	p.file.lists = append(p.file.lists, l)
	return nil
}
