package table

import (
	"fmt"
	"sort"
	"strings"
)

// Directive says what of one package, or of the packages below a path that ends
// in /..., is bound.
type Directive struct {
	Pattern string
	All     bool            // * stands among the names
	Names   map[string]bool // bound, besides all
	Not     map[string]bool // left out
	Skip    bool            // the pattern began with !: no table for it
}

// ParseDirectives reads lines of the form
//
//	PATTERN NAME...
//	!PATTERN
//
// where a name is an exported one, * for all or -Name for one to leave out. A
// line that begins with a space goes on with the line before it; # begins a
// comment.
func ParseDirectives(text string) ([]Directive, error) {
	var out []Directive
	for i, line := range strings.Split(text, "\n") {
		line, _, _ = strings.Cut(line, "#")
		words := strings.Fields(line)
		if len(words) == 0 {
			continue
		}
		if line[0] != ' ' && line[0] != '\t' {
			d := Directive{Pattern: strings.TrimPrefix(words[0], "!"), Skip: words[0][0] == '!', Names: map[string]bool{}, Not: map[string]bool{}}
			out = append(out, d)
			words = words[1:]
		}
		if len(out) == 0 {
			return nil, fmt.Errorf("line %d: it goes on with nothing", i+1)
		}
		d := &out[len(out)-1]
		for _, w := range words {
			switch {
			case w == "*":
				d.All = true
			case w[0] == '-':
				d.Not[w[1:]] = true
			default:
				d.Names[w] = true
			}
		}
	}
	for _, d := range out {
		if !d.Skip && !d.All && len(d.Names) == 0 {
			return nil, fmt.Errorf("%s: no names; * means all", d.Pattern)
		}
	}
	return out, nil
}

// wants tells whether an exported name is bound.
func (d *Directive) wants(name string) bool {
	return (d.All || d.Names[name]) && !d.Not[name]
}

// unknown gives the names in the directive that the package does not export,
// sorted.
func (d *Directive) unknown(exported map[string]bool) []string {
	var out []string
	for _, set := range []map[string]bool{d.Names, d.Not} {
		for n := range set {
			if !exported[n] {
				out = append(out, n)
			}
		}
	}
	sort.Strings(out)
	return out
}

// directiveFor gives the last directive that matches; later lines overrule
// earlier ones.
func directiveFor(all []Directive, path string) *Directive {
	var found *Directive
	for i := range all {
		if matches(all[i].Pattern, path) {
			found = &all[i]
		}
	}
	return found
}

func matches(pattern, path string) bool {
	base, below := strings.CutSuffix(pattern, "/...")
	return path == base || below && strings.HasPrefix(path, base+"/")
}
