package crystal

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// ParseOp reads an operator in the spellings found in files: "x,y,z",
// "-X+1/2, Y, -Z", "1/2-x,1/2+y,-z", "x+0.5,y,z", with or without blanks and
// enclosing quotes, the terms of a component in any order. A decimal
// translation must lie within one unit of its last digit, and within 0.004, of a
// multiple of 1/24 ("0.3333", "0.67"; "0.3" could be many and is refused). The
// translation is reduced to [0, 1). The error names the component and what is
// wrong with it.
func ParseOp(s string) (Op, error) {
	text := strings.TrimSpace(s)
	if n := len(text); n >= 2 && (text[0] == '\'' || text[0] == '"') && text[n-1] == text[0] {
		text = text[1 : n-1]
	}
	parts := strings.Split(text, ",")
	if len(parts) != 3 {
		return Op{}, fmt.Errorf("symmetry operator %q: %d components separated by commas, want 3", s, len(parts))
	}
	var o Op
	for i, part := range parts {
		row, t, err := parseComponent(part)
		if err != nil {
			return Op{}, fmt.Errorf("symmetry operator %q: component %d: %w", s, i+1, err)
		}
		o.T[i] = int8(mod(t, Twentyfourths))
		for j := range 3 {
			if abs(row[j]) > maxEntry {
				return Op{}, fmt.Errorf("symmetry operator %q: component %d: coefficient %d of %c is outside -%d to %d", s, i+1, row[j], "xyz"[j], maxEntry, maxEntry)
			}
			o.R[i][j] = int8(row[j])
		}
	}
	if err := o.check(); err != nil {
		return Op{}, fmt.Errorf("symmetry operator %q: %w", s, err)
	}
	return o, nil
}

// parseComponent reads one component, such as "1/2-x+y", into its coefficients
// and its translation in 24ths.
func parseComponent(part string) (row [3]int, t int, err error) {
	text := strings.ToLower(strings.Map(func(r rune) rune {
		switch r {
		case ' ', '\t', '\r', '\n':
			return -1
		case '\u2212', '\u2013':
			return '-'
		}
		return r
	}, part))
	if text == "" {
		return row, 0, errors.New("empty")
	}
	for first := true; text != ""; first = false {
		sign := 1
		switch text[0] {
		case '-':
			sign, text = -1, text[1:]
		case '+':
			text = text[1:]
		default:
			if !first {
				return row, 0, fmt.Errorf("no sign before %q", text)
			}
		}
		number := text[:len(text)-len(strings.TrimLeft(text, "0123456789./"))]
		text = text[len(number):]
		axis := -1
		if number != "" && strings.HasPrefix(text, "*") {
			text = text[1:]
			if text == "" {
				return row, 0, errors.New("nothing follows *")
			}
		}
		if text != "" {
			if axis = strings.IndexByte("xyz", text[0]); axis >= 0 {
				text = text[1:]
			}
		}
		switch {
		case axis < 0 && number == "":
			if text == "" {
				return row, 0, errors.New("ends in a sign")
			}
			return row, 0, fmt.Errorf("%q where x, y, z or a number was expected", text)
		case axis < 0:
			v, err := parseFraction(number)
			if err != nil {
				return row, 0, err
			}
			t += sign * v
		default:
			c := 1
			if number != "" {
				if c, err = strconv.Atoi(number); err != nil || c > maxEntry {
					return row, 0, fmt.Errorf("coefficient %q of %c is not a whole number up to %d", number, "xyz"[axis], maxEntry)
				}
			}
			row[axis] += sign * c
		}
		if abs(t) > 1000*Twentyfourths {
			return row, 0, errors.New("translation is more than 1000 cells")
		}
	}
	return row, t, nil
}

// parseFraction reads "1/2", "0.5", ".3333" or "1" as 24ths.
func parseFraction(number string) (int, error) {
	if num, den, ok := strings.Cut(number, "/"); ok {
		n, err1 := parseNumber(num)
		d, err2 := parseNumber(den)
		if err1 != nil || err2 != nil || d < 1 || d > 1000 || n > 1000 {
			return 0, fmt.Errorf("%q is not a fraction", number)
		}
		v := n * Twentyfourths / d
		if v != math.Trunc(v) {
			return 0, fmt.Errorf("translation %q is not a multiple of 1/24", number)
		}
		return int(v), nil
	}
	v, err := parseNumber(number)
	if err != nil || v > 1000 {
		return 0, fmt.Errorf("%q is not a number", number)
	}
	digits := 0
	if _, after, ok := strings.Cut(number, "."); ok {
		digits = len(after)
	}
	nearest := math.Round(v * Twentyfourths)
	// Files give thirds and sixths cut or rounded to a few digits.
	if math.Abs(v-nearest/Twentyfourths) > math.Min(0.004, math.Pow(10, -float64(digits)))+1e-12 {
		return 0, fmt.Errorf("translation %q is not near enough to a multiple of 1/24", number)
	}
	return int(nearest), nil
}

func parseNumber(s string) (float64, error) {
	if s == "" || s == "." || strings.Contains(s, "/") {
		return 0, errors.New("not a number")
	}
	return strconv.ParseFloat(s, 64)
}

// ParseOperators reads a complete list of operators and makes the group of them
// with FromOperators. The error of a single operator names its place, from 1.
func ParseOperators(lines []string) (*Group, error) {
	ops := make([]Op, len(lines))
	for i, line := range lines {
		o, err := ParseOp(line)
		if err != nil {
			return nil, fmt.Errorf("operator %d of %d: %w", i+1, len(lines), err)
		}
		ops[i] = o
	}
	return FromOperators(ops)
}
