package text

import (
	"encoding/binary"
	"math"
	"strconv"
)

var powersOfTen = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12,
	1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

var wholePowers = func() (p [20]uint64) {
	p[0] = 1
	for i := range p[1:] {
		p[i+1] = 10 * p[i]
	}
	return p
}()

// digitRun returns the number that the digits from data[i] on make and how many there
// are; the number is right up to 19 digits.
func digitRun(data []byte, i int) (m uint64, n int) {
	start := i
	if i+window <= len(data) {
		w := binary.LittleEndian.Uint64(data[i:i+8]) ^ zeros
		length := runBits(w)
		if length < 64 {
			return digitsValue(w, length) * uint64(min(length, 1)), length / 8
		}
		m, i = digitsValue(w, 64), i+window
	}
	for i < len(data) {
		d := data[i] - '0'
		if d > 9 {
			break
		}
		m = m*10 + uint64(d)
		i++
	}
	return m, i - start
}

// FastFloat reads the decimal number that starts at data[i], i < len(data), and
// returns it with the offset behind it. ok is false when there is none or when it
// is outside the range in which one multiplication or division of two exactly
// represented numbers rounds correctly (Clinger 1990, Proc. PLDI, 92-101: mantissa
// up to 2^53, power of ten up to 22); ParseNumber then decides.
func FastFloat(data []byte, i int) (x float64, next int, ok bool) {
	neg := false
	if c := data[i]; c == '-' || c == '+' {
		neg = c == '-'
		i++
	}
	m, digits := digitRun(data, i)
	i += digits
	exp := 0
	if i < len(data) && data[i] == '.' {
		fraction, n := digitRun(data, i+1)
		i, digits, exp = i+1+n, digits+n, -n
		if digits > 19 {
			return 0, i, false
		}
		m = m*wholePowers[n] + fraction
	}
	if digits == 0 || digits > 19 || m > 1<<53 {
		return 0, i, false
	}
	if i < len(data) && data[i]|0x20 == 'e' {
		var e int
		if e, i, ok = exponent(data, i+1); !ok {
			return 0, i, false
		}
		exp += e
	}
	x = float64(m)
	if exp < 0 {
		if exp < -22 {
			return 0, i, false
		}
		x /= powersOfTen[-exp]
	} else if exp > 0 {
		if exp > 22 {
			return 0, i, false
		}
		x *= powersOfTen[exp]
	}
	if neg {
		x = -x
	}
	return x, i, true
}

func exponent(data []byte, i int) (e, next int, ok bool) {
	neg := false
	if i < len(data) && (data[i] == '-' || data[i] == '+') {
		neg = data[i] == '-'
		i++
	}
	start := i
	for i < len(data) && data[i]-'0' <= 9 {
		if e < 100000 {
			e = e*10 + int(data[i]-'0')
		}
		i++
	}
	if neg {
		e = -e
	}
	return e, i, i > start
}

// FastInt reads the integer that starts at data[i], i < len(data), with at most
// nine digits, and returns it with the offset behind it.
func FastInt(data []byte, i int) (n, next int, ok bool) {
	neg := false
	if c := data[i]; c == '-' || c == '+' {
		neg = c == '-'
		i++
	}
	start := i
	for i < len(data) {
		d := data[i] - '0'
		if d > 9 {
			break
		}
		n = n*10 + int(d)
		i++
	}
	if neg {
		n = -n
	}
	return n, i, i > start && i-start <= 9
}

// ParseNumber reads the whole of token as a number in the form of CIF 1.1: sign,
// digits with an optional point, exponent, and optionally a standard uncertainty
// in parentheses that counts units of the last digit of the mantissa. su is NaN
// when none is given. Words such as NaN or Inf, hexadecimal and underscored
// numbers are no numbers; nor is what overflows float64.
func ParseNumber(token []byte) (x, su float64, ok bool) {
	if len(token) == 0 {
		return 0, 0, false
	}
	if x, next, ok := FastFloat(token, 0); ok && next == len(token) {
		return x, math.NaN(), true
	}
	i, digits, decimals := 0, 0, 0
	if i < len(token) && (token[i] == '-' || token[i] == '+') {
		i++
	}
	for i < len(token) && token[i]-'0' <= 9 {
		i, digits = i+1, digits+1
	}
	if i < len(token) && token[i] == '.' {
		i++
		for i < len(token) && token[i]-'0' <= 9 {
			i, digits, decimals = i+1, digits+1, decimals+1
		}
	}
	if digits == 0 {
		return 0, 0, false
	}
	exp := 0
	if i < len(token) && token[i]|0x20 == 'e' {
		if exp, i, ok = exponent(token, i+1); !ok {
			return 0, 0, false
		}
	}
	x, err := strconv.ParseFloat(string(token[:i]), 64)
	if err != nil {
		return 0, 0, false
	}
	if i == len(token) {
		return x, math.NaN(), true
	}
	su, ok = uncertainty(token[i:], exp-decimals)
	return x, su, ok
}

func uncertainty(paren []byte, power int) (float64, bool) {
	n := len(paren)
	if n < 3 || paren[0] != '(' || paren[n-1] != ')' {
		return 0, false
	}
	for _, c := range paren[1 : n-1] {
		if c-'0' > 9 {
			return 0, false
		}
	}
	su, err := strconv.ParseFloat(string(paren[1:n-1])+"e"+strconv.Itoa(power), 64)
	return su, err == nil
}

// ParseIndex reads the whole of token as an integer of at most nine digits; forms
// such as "+2", "-1.0" and "1e1" count when their value is integral.
func ParseIndex(token []byte) (int, bool) {
	if len(token) == 0 {
		return 0, false
	}
	if n, next, ok := FastInt(token, 0); ok && next == len(token) {
		return n, true
	}
	x, su, ok := ParseNumber(token)
	if !ok || !math.IsNaN(su) || x != math.Trunc(x) || math.Abs(x) > 999999999 {
		return 0, false
	}
	return int(x), true
}
