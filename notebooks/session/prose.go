package session

import (
	"regexp"
	"strings"
)

// The words of results are plain letters, for they stand in files too; what is shown
// takes the signs of print.
var (
	negative  = regexp.MustCompile(`(^|[\s(=;:/])-(\d|\x{221e}|inf\b)`)
	times     = regexp.MustCompile(`(\d) x (\d|[A-Z]\b)`)
	screw     = regexp.MustCompile(`\b([2346])_([1-5])\b`)
	angstrom  = regexp.MustCompile(`(\d) A($|[,;.:)\x{b2}\x{b3}]| [a-z(])`)
	powerA    = regexp.MustCompile(`\bA([\x{b2}\x{b3}])`)
	oneOfMany = regexp.MustCompile(`(^|[^\d.,])1 ((?:other )?)(choice|contrast|crystal|file|frame|level|observation|pair|position|range|reflection|row|shell)s\b`)
	signs     = strings.NewReplacer("+-", "\u00b1", " - ", " \u2212 ", "^2", "\u00b2", "^3", "\u00b3", ">=", "\u2265", "<=", "\u2264", "/sigma", "/\u03c3", "sigma(I)", "\u03c3(I)")
	greek     = strings.NewReplacer("tau\u00b2", "\u03c4\u00b2", "chi\u00b2", "\u03c7\u00b2")
)

// prose sets words of a result for reading: minus and multiplication signs, powers,
// angstrom and screw axes as they are printed, and one thing in the singular. Names of
// files are no prose and must not come here.
func prose(s string) string {
	if s == "" {
		return ""
	}
	s = greek.Replace(signs.Replace(s))
	s = negative.ReplaceAllString(s, "$1\u2212$2")
	s = times.ReplaceAllString(s, "$1 \u00d7 $2")
	s = angstrom.ReplaceAllString(s, "$1 \u00c5$2")
	s = powerA.ReplaceAllString(s, "\u00c5$1")
	s = oneOfMany.ReplaceAllString(s, "${1}1 $2$3")
	return screw.ReplaceAllStringFunc(s, func(m string) string {
		return m[:1] + string('\u2080'+rune(m[2]-'0'))
	})
}

// bound keeps a contrast on one line.
func bound(s string) string { return strings.ReplaceAll(s, " \u2212 ", "\u00a0\u2212\u00a0") }

// farthest cuts "farthest in PLACE: " off the words of a ledger entry and gives the
// place apart; names are the places there are, since a contrast holds a colon itself.
func farthest(why string, names []string) (place, rest string) {
	tail, ok := strings.CutPrefix(why, "farthest in ")
	if !ok {
		return "", why
	}
	rest = why
	for _, name := range names {
		if after, ok := strings.CutPrefix(tail, name+": "); ok && len(name) > len(place) {
			place, rest = name, after
		}
	}
	return place, rest
}
