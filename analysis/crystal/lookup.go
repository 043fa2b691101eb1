package crystal

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"sync"
)

// Lookup finds a space group by what people write:
//
//   - a number, "19", which means the first setting tabulated (unique axis b,
//     cell choice 1, hexagonal axes) with the inversion at the origin;
//   - a Hermann-Mauguin symbol, short or full, with blanks or without, in any
//     case, "P 21 21 21", "P212121", "P2_1/c", "P2(1)/n", "P 1 21/n 1", "r-3c",
//     the symbols before the e glide ("Cmca") and without the bar ("Fd3m"), and
//     "H 3" or "R 3 2 H" for hexagonal axes;
//   - either of them with a choice after a colon, "R -3 c :R", "F d d d :1",
//     "P 21/c :c1";
//   - a Hall symbol: any tabulated one, and any other that is unmistakably one
//     because it begins with - or names an axis or origin.
//
// "P 2" is read as the Hermann-Mauguin symbol, so unique axis b. What could be
// two groups ("P 3 2" is a Hall symbol of number 149 and a spelling of P 32) is
// an error that names both; an unknown symbol is one that suggests near ones.
func Lookup(symbol string) (*Group, error) {
	if err := tooLong(symbol); err != nil {
		return nil, err
	}
	text, suffix := splitChoice(plainSymbol(symbol))
	if text == "" {
		return nil, fmt.Errorf("space group %q: empty symbol", symbol)
	}
	b := book()
	if n, err := strconv.Atoi(strings.TrimPrefix(text, "#")); err == nil {
		if n < 1 || n > 230 {
			return nil, fmt.Errorf("space group %q: numbers run from 1 to 230", symbol)
		}
		return choose(symbol, b.byNumber[n], suffix)
	}
	if found := b.byParts[text]; found != nil {
		return choose(symbol, found, suffix)
	}
	compact := b.byCompact[strings.ReplaceAll(text, " ", "")]
	if i, ok := b.byHall[hallKey(symbol)]; ok {
		s := table()[i]
		if compact != nil && table()[compact[0]].Number != s.Number {
			other := table()[compact[0]]
			return nil, fmt.Errorf("space group %q: could be the Hall symbol of %s (number %d) or a spelling of %s (number %d); write one of these",
				symbol, s.Symbol(), s.Number, other.Symbol(), other.Number)
		}
		return s.Group()
	}
	if compact != nil {
		return choose(symbol, compact, suffix)
	}
	if t := unquoted(symbol); strings.HasPrefix(t, "-") || strings.ContainsAny(strings.ToLower(t), "xyz'\"*") {
		return FromHall(t)
	}
	return nil, fmt.Errorf("space group %q is not known%s", symbol, b.suggest(strings.ReplaceAll(text, " ", "")))
}

// choose picks among the settings that share a symbol or number.
func choose(symbol string, found []int, suffix string) (*Group, error) {
	all := table()
	if suffix == "" {
		return all[found[0]].Group()
	}
	var choices []string
	for _, i := range found {
		if strings.EqualFold(all[i].Choice, suffix) {
			return all[i].Group()
		}
		if all[i].Choice != "" && !slices.Contains(choices, all[i].Choice) {
			choices = append(choices, all[i].Choice)
		}
	}
	// The symbol of the type stands for all its settings.
	if siblings := book().byNumber[all[found[0]].Number]; siblings[0] == found[0] {
		for _, i := range siblings {
			if strings.EqualFold(all[i].Choice, suffix) {
				return all[i].Group()
			}
		}
	}
	for _, i := range found {
		if c := all[i].Choice; (suffix == "1" || suffix == "2") && strings.HasPrefix(c, suffix) {
			return all[i].Group()
		}
	}
	if len(choices) == 0 {
		return nil, fmt.Errorf("space group %q: there is one setting only, no choice %q", symbol, suffix)
	}
	return nil, fmt.Errorf("space group %q: no choice %q; there are %s", symbol, suffix, strings.Join(choices, ", "))
}

func unquoted(s string) string {
	s = strings.TrimSpace(s)
	if n := len(s); n >= 2 && (s[0] == '\'' || s[0] == '"') && s[n-1] == s[0] {
		return strings.TrimSpace(s[1 : n-1])
	}
	return s
}

// plainSymbol brings a Hermann-Mauguin symbol to lower case with single blanks,
// no marks for subscripts, and bars as minus signs before the digit.
func plainSymbol(s string) string {
	s = strings.ToLower(unquoted(s))
	for _, word := range []string{"(origin choice ", "(origin ", "origin choice ", "origin "} {
		if head, tail, ok := strings.Cut(s, word); ok {
			s = head + ":" + strings.TrimSuffix(tail, ")")
			break
		}
	}
	for word, choice := range map[string]string{"hexagonal axes": "h", "rhombohedral axes": "r"} {
		if head, tail, ok := strings.Cut(s, word); ok && strings.Trim(tail, " )") == "" {
			s = strings.TrimRight(head, " (") + ":" + choice
		}
	}
	s = strings.ReplaceAll(s, "\\bar", "-")
	var out []rune
	for _, r := range s {
		switch {
		case r >= '\u2080' && r <= '\u2089':
			out = append(out, r-'\u2080'+'0')
		case r == '\u2212' || r == '\u2013':
			out = append(out, '-')
		case r == '\u0304' || r == '\u0305':
			if n := len(out); n > 0 {
				out = append(out[:n-1], '-', out[n-1])
			}
		case strings.ContainsRune("_~{}()$", r):
		case r == '\t' || r == '\u00a0':
			out = append(out, ' ')
		default:
			out = append(out, r)
		}
	}
	s = strings.Join(strings.Fields(string(out)), " ")
	return strings.ReplaceAll(strings.ReplaceAll(s, " /", "/"), "/ ", "/")
}

// splitChoice takes off a choice after a colon, the H or R that ends a
// rhombohedral symbol or begins it, and the S or Z with which older lists of symbols
// write origin choices 1 and 2 (common practice, no source).
func splitChoice(s string) (text, choice string) {
	text, choice, colon := strings.Cut(s, ":")
	text, choice = strings.TrimSpace(text), strings.TrimSpace(choice)
	if n := len(text); !colon && n > 2 && text[0] == 'r' && (text[n-1] == 'h' || text[n-1] == 'r') {
		text, choice = strings.TrimSpace(text[:n-1]), text[n-1:]
	}
	if n := len(text); !colon && n > 2 && (text[n-1] == 's' || text[n-1] == 'z') {
		text, choice = strings.TrimSpace(text[:n-1]), map[byte]string{'s': "1", 'z': "2"}[text[n-1]]
	}
	if strings.HasPrefix(text, "h") && (choice == "" || choice == "h") {
		text, choice = "r"+text[1:], "h"
	}
	return text, choice
}

func hallKey(s string) string {
	return strings.Join(strings.Fields(strings.ToLower(strings.ReplaceAll(unquoted(s), "_", " "))), " ")
}

// symbolBook maps spellings to places in the table; the first of several places
// is the one meant when no choice is written.
type symbolBook struct {
	byNumber  [231][]int
	byParts   map[string][]int
	byCompact map[string][]int
	byHall    map[string]int
}

// book is made once and never changed.
var book = sync.OnceValue(func() *symbolBook {
	b := &symbolBook{byParts: map[string][]int{}, byCompact: map[string][]int{}, byHall: map[string]int{}}
	all := table()
	order := preferred(all)
	for _, i := range order {
		b.byNumber[all[i].Number] = append(b.byNumber[all[i].Number], i)
	}
	for i := range all {
		if key := hallKey(all[i].Hall); b.byHall[key] == 0 {
			b.byHall[key] = i
		}
	}
	for rank := range spellings(all[0]) {
		for _, i := range order {
			b.add(spellings(all[i])[rank], i)
		}
	}
	return b
})

func (b *symbolBook) add(symbol string, i int) {
	if symbol == "" {
		return
	}
	parts := strings.ToLower(symbol)
	compact := strings.ReplaceAll(parts, " ", "")
	if !slices.Contains(b.byParts[parts], i) {
		b.byParts[parts] = append(b.byParts[parts], i)
	}
	if !slices.Contains(b.byCompact[compact], i) {
		b.byCompact[compact] = append(b.byCompact[compact], i)
	}
}

// spellings are the ways to write the symbol of a setting, empty where one does
// not apply: full, short, without the ones of a monoclinic symbol, with a letter
// for the e glide, without the bar over the 3 of a cubic symbol.
func spellings(s Setting) [5]string {
	short := shortSymbol(s.Full)
	w := [5]string{s.Full, short}
	if f := strings.Fields(s.Full); s.Number >= 3 && s.Number <= 15 {
		kept := f[:1:1]
		for _, part := range f[1:] {
			if part != "1" {
				kept = append(kept, part)
			}
		}
		w[2] = strings.Join(kept, " ")
	}
	if letter := glideLetter(s); letter != "" {
		w[3] = short[:1] + strings.ReplaceAll(short[1:], "e", letter)
	}
	if s.Number >= 200 && strings.Contains(short, "-3") {
		w[4] = strings.ReplaceAll(short, "-3", "3")
	}
	return w
}

// glideLetter is the letter that stood for the double glide e before 1992 (de
// Wolff et al., Acta Cryst. A48, 727), by the permutation of axes.
func glideLetter(s Setting) string {
	permutation := strings.TrimLeft(s.Choice, "12")
	switch s.Number {
	case 39, 41:
		return map[string]string{"": "b", "ba-c": "a", "cab": "c", "-cba": "b", "bca": "a", "a-cb": "c"}[permutation]
	case 64, 67, 68:
		return map[string]string{"": "a", "ba-c": "b", "cab": "b", "-cba": "c", "bca": "c", "a-cb": "a"}[permutation]
	}
	return ""
}

// suggest names up to three known spellings near an unknown one, nearest first,
// in the order of the table among equally near ones.
func (b *symbolBook) suggest(compact string) string {
	type near struct {
		symbol   string
		distance int
	}
	var found []near
	all := table()
	for _, i := range preferred(all) {
		best := near{distance: max(1, len(compact)/3) + 1}
		w := spellings(all[i])
		for _, symbol := range []string{w[2], w[1], w[0], w[3], w[4]} {
			if symbol == "" {
				continue
			}
			if d := editDistance(compact, strings.ReplaceAll(strings.ToLower(symbol), " ", "")); d < best.distance {
				best = near{symbol, d}
			}
		}
		if best.symbol != "" && !slices.ContainsFunc(found, func(n near) bool { return n.symbol == best.symbol }) {
			found = append(found, best)
		}
	}
	if len(found) == 0 {
		return "; give a number from 1 to 230, a Hermann-Mauguin or Hall symbol, or a list of operators"
	}
	slices.SortStableFunc(found, func(a, b near) int { return a.distance - b.distance })
	var names []string
	for _, n := range found[:min(3, len(found))] {
		names = append(names, n.symbol)
	}
	return "; near it are " + strings.Join(names, ", ")
}

// editDistance is the number of letters to insert, delete, change or swap with
// the next that turn a into b (Damerau 1964, restricted form).
func editDistance(a, b string) int {
	rows := make([][]int, len(a)+1)
	for i := range rows {
		rows[i] = make([]int, len(b)+1)
		rows[i][0] = i
	}
	for j := range rows[0] {
		rows[0][j] = j
	}
	for i := 1; i <= len(a); i++ {
		for j := 1; j <= len(b); j++ {
			change := 1
			if a[i-1] == b[j-1] {
				change = 0
			}
			rows[i][j] = min(rows[i-1][j]+1, rows[i][j-1]+1, rows[i-1][j-1]+change)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				rows[i][j] = min(rows[i][j], rows[i-2][j-2]+1)
			}
		}
	}
	return rows[len(a)][len(b)]
}

// longestSymbol is far beyond any symbol of a space group in bytes; looking for
// names near a longer text would take long and help nobody.
const longestSymbol = 200

func tooLong(symbol string) error {
	if len(symbol) <= longestSymbol {
		return nil
	}
	return fmt.Errorf("space group %.40q...: %d bytes are no symbol, the longest allowed is %d", symbol, len(symbol), longestSymbol)
}
