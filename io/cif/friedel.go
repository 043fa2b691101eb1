package cif

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

// friedel says what a merged list holds of the two members of a Friedel pair, which
// macromolecular files give in one row, I+ of (h k l) and I- of (-h -k -l).
type friedel uint8

const (
	friedelNone   friedel = iota
	friedelBoth           // I+ and I-: a row of the file becomes two
	friedelPlus           // I+ alone
	friedelMinus          // I- alone, the indices are those of its mate
	friedelUnused         // a mean, and I+ and I- that are not used
)

const reasonRepeated = "Friedel mate repeats intensity and sigma"

// mates completes the plan once measure m, in column best, was chosen.
func (p *plan) mates(c *category, m *measure, best int, find func(string) int, use func(int, role)) {
	if m.mate == "" {
		for _, other := range c.measures {
			if other.mate != "" && (find(other.name) >= 0 || find(other.mate) >= 0) {
				p.friedel = friedelUnused
			}
		}
		return
	}
	mate, sigma := find(m.mate), find(m.mateSigma)
	switch {
	case best == mate:
		p.friedel = friedelMinus
	case mate < 0 || sigma < 0:
		p.friedel = friedelPlus
	default:
		p.friedel = friedelBoth
		use(mate, roleMate)
		use(sigma, roleMateSigma)
	}
}

// unfold makes two rows of every row of a list of pairs, I+ first, and gives the mates
// their own indices. A mate that repeats both numbers of I+ is marked: it is the same
// measurement, as files write it for centric reflections.
func (l *list) unfold() {
	r := &l.raw
	switch l.plan.friedel {
	case friedelMinus:
		negate(r.H, 0, 1)
		negate(r.K, 0, 1)
		negate(r.L, 0, 1)
	case friedelBoth:
		l.count = l.countMates()
		r.I, r.Sigma = interleave(r.I, l.mate.I), interleave(r.Sigma, l.mate.Sigma)
		r.H, r.K, r.L = interleave(r.H, r.H), interleave(r.K, r.K), interleave(r.L, r.L)
		negate(r.H, 1, 2)
		negate(r.K, 1, 2)
		negate(r.L, 1, 2)
		r.Frame = interleave(r.Frame, r.Frame)
		l.status, l.scale.of, l.dataSet.of = interleave(l.status, l.status), interleave(l.scale.of, l.scale.of), interleave(l.dataSet.of, l.dataSet.of)
		if l.status == nil {
			l.status = make([]uint8, len(r.I))
		}
		l.mate, l.rows, l.fold = intensity.Columns{}, 2*l.rows, 2
		for i := 1; i < l.rows; i += 2 {
			if r.I[i] == r.I[i-1] && r.Sigma[i] == r.Sigma[i-1] && l.status[i] == statusKeep {
				l.status[i] = statusRepeated
			}
		}
	}
}

func interleave[T any](a, b []T) []T {
	if a == nil {
		return nil
	}
	out := make([]T, 2*len(a))
	for i := range a {
		out[2*i], out[2*i+1] = a[i], b[i]
	}
	return out
}

// negate changes the sign of every step-th index from the first on; the mark of a null
// is its own negative.
func negate(x []int16, first, step int) {
	for i := first; i < len(x); i += step {
		x[i] = -x[i]
	}
}

// mateCount is how many rows of the file give both members of a pair, or one.
type mateCount struct{ both, plus, minus, repeated int }

func (l *list) countMates() (n mateCount) {
	for i, plus := range l.raw.I {
		minus := l.mate.I[i]
		switch {
		case math.IsNaN(plus) && math.IsNaN(minus):
		case math.IsNaN(minus):
			n.plus++
		case math.IsNaN(plus):
			n.minus++
		default:
			n.both++
			if plus == minus && l.raw.Sigma[i] == l.mate.Sigma[i] {
				n.repeated++
			}
		}
	}
	return n
}

func (l *list) friedelWarnings() []intensity.Warning {
	p := l.plan
	code, sentence := "", ""
	switch p.friedel {
	case friedelBoth:
		code = "friedel-pairs"
		sentence = fmt.Sprintf("the list gives %s and %s and no mean: its %d rows were read as %d, (h k l) and (-h -k -l); %d rows hold both, %d only the first, %d only the second; in %d both are the same number and the second was set aside",
			p.item[roleIntensity], p.item[roleMate], l.rows/2, l.rows, l.count.both, l.count.plus, l.count.minus, l.count.repeated)
	case friedelPlus:
		code, sentence = "friedel-half", "the list gives "+p.item[roleIntensity]+" and neither a mean nor the Friedel mates; its rows were read as they stand"
	case friedelMinus:
		code, sentence = "friedel-half", "the list gives "+p.item[roleIntensity]+" and neither a mean nor the Friedel mates; its rows were read with the indices (-h -k -l)"
	case friedelUnused:
		code, sentence = "friedel-mean", "the list also gives Friedel mates apart; "+p.item[roleIntensity]+" was taken, which does not keep them apart"
	default:
		return nil
	}
	return []intensity.Warning{{Code: code, Text: sentence, Where: where(l.file.Name, l.line(0))}}
}

// growMates makes room for n rows of mates.
func (l *list) growMates(n int) {
	if l.plan.friedel == friedelBoth {
		l.mate.I, l.mate.Sigma = text.Grown(l.mate.I, n), text.Grown(l.mate.Sigma, n)
	}
}
