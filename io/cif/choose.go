package cif

import (
	"fmt"
	"strconv"
	"strings"

	"thinward/analysis/intensity"
)

// choice is one data set: a list and perhaps one of the sets inside it.
type choice struct {
	list              *list
	dataSet, scaleSet int32 // -1 for all
	warnings          []intensity.Warning
}

func (f *File) choose(sel Selection) (*choice, error) {
	if len(f.data) == 0 {
		return nil, &Error{File: f.Name, Problem: "the file is empty", Remedy: "look whether it was cut off or never written"}
	}
	if len(f.lists) == 0 {
		return nil, &Error{File: f.Name, Problem: "the file holds no reflection list; " + f.contents(), Remedy: "name a file with a _diffrn_refln or _refln loop"}
	}
	lists, parts, err := f.narrow(sel.Pick)
	if err != nil {
		return nil, err
	}
	c := &choice{dataSet: -1, scaleSet: -1}
	if c.list, err = f.one(lists, parts, c); err != nil {
		return nil, err
	}
	for _, part := range parts {
		if !c.within(part) {
			return nil, f.noSuch(sel.Pick)
		}
	}
	if err := c.list.usable(); err != nil {
		return nil, err
	}
	return c, c.alone(sel)
}

// narrow takes the parts of pick that name blocks and categories and returns what
// is left: lists, and parts that name sets inside a list.
func (f *File) narrow(pick string) ([]*list, []string, error) {
	lists := f.lists
	rest := strings.TrimSpace(pick)
	if rest == "" {
		return lists, nil, nil
	}
	if found := ofBlock(lists, rest); len(found) > 0 {
		return found, nil, nil
	}
	var parts []string
	for {
		part, tail, more := f.cutPart(lists, rest)
		switch found := matching(lists, part); {
		case len(found) > 0:
			lists = found
		case part == "" || strings.HasPrefix(part, "#") || strings.HasPrefix(part, "_"):
			return nil, nil, f.noSuch(pick)
		default:
			parts = append(parts, part)
		}
		if !more {
			return lists, parts, nil
		}
		rest = tail
	}
}

// cutPart cuts pick at a slash, but not inside a block code.
func (f *File) cutPart(lists []*list, pick string) (part, tail string, more bool) {
	for _, l := range lists {
		code := l.block.Code
		if n := len(code); n > 0 && len(pick) > n && pick[n] == '/' && strings.EqualFold(pick[:n], code) {
			return pick[:n], pick[n+1:], true
		}
	}
	return strings.Cut(pick, "/")
}

func ofBlock(lists []*list, code string) []*list {
	var out []*list
	for _, l := range lists {
		if strings.EqualFold(l.block.Code, code) || l.parent != nil && strings.EqualFold(l.parent.Code, code) {
			out = append(out, l)
		}
	}
	return out
}

func matching(lists []*list, part string) []*list {
	if found := ofBlock(lists, part); len(found) > 0 {
		return found
	}
	var out []*list
	for _, l := range lists {
		position := l.block.Position
		if l.parent != nil {
			position = l.parent.Position
		}
		if part == "#"+strconv.Itoa(position) || strings.EqualFold(part, l.name()) {
			out = append(out, l)
		}
	}
	return out
}

func (l *list) name() string {
	if l.item != "" {
		return l.item
	}
	return l.plan.category.name
}

// one leaves a single list: of several, those that hold the sets asked for; then
// single measurements before merged ones within one block.
func (f *File) one(lists []*list, parts []string, c *choice) (*list, error) {
	if len(lists) > 1 && len(parts) > 0 {
		var holding []*list
		for _, l := range lists {
			if try := (&choice{list: l, dataSet: -1, scaleSet: -1}); try.withinAll(parts) {
				holding = append(holding, l)
			}
		}
		if len(holding) > 0 {
			lists = holding
		}
	}
	if len(lists) > 1 && sameBlock(lists) {
		var single []*list
		for _, l := range lists {
			if l.item == "" && !l.merged() {
				single = append(single, l)
			}
		}
		if len(single) == 1 {
			c.warnings = append(c.warnings, intensity.Warning{Code: "several-lists", Where: f.Name,
				Text: "block " + single[0].block.Code + " holds several reflection lists; the single measurements of " + single[0].name() + " were taken"})
			lists = single
		}
	}
	if len(lists) > 1 {
		return nil, &Error{File: f.Name, Problem: "the file holds several reflection lists: " + names(lists), Remedy: "pick one by its block, such as " + strconv.Quote(lists[0].pick()) + ", or by block and category, such as " + strconv.Quote(lists[0].pick()+"/"+lists[0].name()) + ", as block in the manifest"}
	}
	return lists[0], nil
}

func sameBlock(lists []*list) bool {
	for _, l := range lists {
		if l.home() != lists[0].home() {
			return false
		}
	}
	return true
}

func (l *list) home() *Block {
	if l.parent != nil {
		return l.parent
	}
	return l.block
}

func (l *list) pick() string { return "#" + strconv.Itoa(l.home().Position) }

func names(lists []*list) string {
	out := make([]string, len(lists))
	for i, l := range lists {
		kind := "single measurements"
		if l.merged() {
			kind = "merged"
		}
		out[i] = fmt.Sprintf("%s %s (%s, %d rows)", l.home(), l.name(), kind, l.rows)
	}
	return strings.Join(out, "; ")
}

func (c *choice) withinAll(parts []string) bool {
	for _, part := range parts {
		if !c.within(part) {
			return false
		}
	}
	return true
}

// within takes part as a set inside the list and reports whether it is one.
func (c *choice) within(part string) bool {
	if code, ok := strings.CutPrefix(part, "%"); ok {
		return find(&c.list.scale, code, &c.scaleSet)
	}
	if code, ok := strings.CutPrefix(part, "diffrn="); ok {
		return find(&c.list.dataSet, code, &c.dataSet)
	}
	return find(&c.list.dataSet, part, &c.dataSet) || find(&c.list.scale, part, &c.scaleSet)
}

func find(c *codes, code string, into *int32) bool {
	id, ok := c.at[code]
	if ok {
		*into = id
	}
	return ok
}

// alone refuses several sets together when that was not asked for.
func (c *choice) alone(sel Selection) error {
	if sel.All {
		return nil
	}
	l := c.list
	for _, set := range []struct {
		kind   string
		prefix string
		codes  *codes
		chosen int32
		role   role
	}{
		{"diffrn_id", "diffrn=", &l.dataSet, c.dataSet, roleDataSet},
		{"scale-group set", "%", &l.scale, c.scaleSet, roleScaleGroup},
	} {
		if set.chosen >= 0 || len(set.codes.word) < 2 {
			continue
		}
		item := l.plan.item[set.role]
		if item == "" {
			item = l.item + l.plan.item[roleScaleSet]
		}
		words := set.codes.word
		shown := words[:min(len(words), 8)]
		return l.fault(l.line(0), item, fmt.Sprintf("the list holds %d data sets told apart by %s: %s", len(words), set.kind, strings.Join(shown, " ")),
			"pick one, such as "+strconv.Quote(set.prefix+words[0])+", as block in the manifest")
	}
	return nil
}

func (f *File) noSuch(pick string) error {
	return &Error{File: f.Name, Problem: "there is no data set " + strconv.Quote(pick) + "; there is " + names(f.lists) + f.sets(),
		Remedy: `pick a block code, "#2" for the second block, a category, a diffrn_id or "%3" for a scale-group set`}
}

func (f *File) sets() string {
	var out strings.Builder
	for _, l := range f.lists {
		if w := l.dataSet.word; len(w) > 0 {
			out.WriteString("; diffrn_id " + strings.Join(w[:min(len(w), 8)], " "))
		}
		if w := l.scale.word; len(w) > 0 {
			out.WriteString("; scale-group sets %" + strings.Join(w[:min(len(w), 8)], " %"))
		}
	}
	return out.String()
}

func (f *File) contents() string {
	codes := make([]string, 0, len(f.Blocks))
	for _, b := range f.Blocks {
		codes = append(codes, b.Code)
	}
	if len(codes) == 0 {
		return "it has no blocks"
	}
	return "its blocks are " + strings.Join(codes[:min(len(codes), 8)], ", ")
}
