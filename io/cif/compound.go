package cif

import (
	"bytes"
	"strings"

	"thinward/io/internal/text"
)

const deepestNesting = 100

// compound goes past a list or table of CIF 2.0 (J. Appl. Cryst. (2016) 49, 277-284)
// and checks its form. It is kept as it stands, brackets included. Values in it stand
// apart by blanks; brackets need none. A key of a table is a quoted string with a
// colon directly behind it.
func (l *lexer) compound(at int) (span, error) {
	var open []byte // '[' in a list, '{' before a key, ':' before its value
	apart := true
	l.i = at
	defer func() { l.inside = 0 }()
	for l.more(l.i) {
		c, here := l.data[l.i], l.i
		switch {
		case l.class[c] == blank:
			l.i, apart = l.i+1, true
			continue
		case c == '#' && apart:
			if err := l.comment(); err != nil {
				return span{}, err
			}
			continue
		case c == ']' || c == '}':
			if top := open[len(open)-1]; top != '[' && c == ']' || top != '{' && c == '}' {
				return span{}, l.fault(here, "a CIF 2.0 list or table is closed by "+string(c)+" where that does not fit", "pair [ with ] and { with }, and give every key a value")
			}
			l.i, open, apart = l.i+1, open[:len(open)-1], false
			if len(open) == 0 {
				if l.more(l.i) && l.class[l.data[l.i]] != blank && !l.endMark(l.i) {
					return span{}, l.fault(here, "a CIF 2.0 list or table is not followed by a blank", "put a blank behind the closing bracket")
				}
				return span{at, l.i, Compound}, nil
			}
			continue
		}
		if !apart {
			return span{}, l.fault(here, "two values inside a CIF 2.0 list or table touch", "put a blank between them")
		}
		var err error
		if open, apart, err = l.element(open); err != nil {
			return span{}, err
		}
	}
	return span{}, l.fault(at, "a CIF 2.0 list or table is not closed before the end of the file", "close it with its bracket")
}

// element goes past one value or key, or an opening bracket; apart says that a value
// may follow directly.
func (l *lexer) element(open []byte) (rest []byte, apart bool, err error) {
	here, top := l.i, len(open)-1
	key := top >= 0 && open[top] == '{'
	if top >= 0 && open[top] == ':' {
		open[top] = '{'
	}
	l.inside = len(open)
	switch c := l.data[here]; {
	case (c == '[' || c == '{') && !key:
		if len(open) == deepestNesting {
			return nil, false, l.fault(here, "CIF 2.0 lists or tables are nested too deeply", "write the values as separate items or a loop")
		}
		l.i++
		return append(open, c), true, nil
	case c == '\'' || c == '"':
		_, err = l.quoted(here)
	case c == ';' && (l.data[here-1] == '\n' || l.data[here-1] == '\r') && !key:
		_, err = l.textField(here)
	case key:
		return nil, false, l.fault(here, "a key of a CIF 2.0 table is not quoted", "put it in quotes, with a colon directly behind")
	default:
		for l.more(l.i) && l.class[l.data[l.i]] != blank && !strings.ContainsRune("[]{}", rune(l.data[l.i])) {
			l.i++
		}
		if err = l.checkRun(here, l.i); err == nil && l.i == here {
			err = l.bad(here)
		}
	}
	if err != nil || !key {
		return open, false, err
	}
	if !l.more(l.i) || l.data[l.i] != ':' {
		return nil, false, l.fault(here, "a key of a CIF 2.0 table has no colon directly behind it", "write 'key':value")
	}
	l.i++
	open[top] = ':'
	return open, true, nil
}

// indexVector reads the value of an item such as _diffrn_refln.hkl: a list of three
// integers.
func indexVector(value []byte) (hkl [3]int, ok bool) {
	inner, open := bytes.CutPrefix(value, []byte{'['})
	inner, closed := bytes.CutSuffix(inner, []byte{']'})
	words := bytes.Fields(inner)
	if !open || !closed || len(words) != 3 {
		return hkl, false
	}
	for j, w := range words {
		if hkl[j], ok = text.ParseIndex(w); !ok {
			return hkl, false
		}
	}
	return hkl, true
}
