package crystal

import (
	_ "embed"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"sync"
)

// The generator gen_settings.go takes the list of settings as its argument; the
// table changes only when the list does.

//go:embed settings.tsv
var settingsText string

// Setting is one of the 530 tabulated settings of the 230 space-group types
// (International Tables B, table A1.4.2.7).
type Setting struct {
	Number int
	Choice string // axes, cell or origin: "b1", "cab", "2", "H"; empty when there is one only
	Full   string // full Hermann-Mauguin symbol, "P 1 21/n 1", "F 41/d -3 2/m"
	Hall   string
	symbol string
}

// Tabulated returns the 530 settings in the order of International Tables.
func Tabulated() []Setting { return append([]Setting(nil), table()...) }

// table is read once and never changed.
var table = sync.OnceValue(func() []Setting {
	var all []Setting
	for line := range strings.Lines(settingsText) {
		f := strings.Split(strings.TrimSuffix(line, "\n"), "\t")
		number, err := strconv.Atoi(f[0])
		if err != nil || len(f) != 4 {
			panic("crystal: settings.tsv: bad line " + line)
		}
		all = append(all, Setting{Number: number, Choice: f[1], Full: f[2], Hall: f[3]})
	}
	first := map[string]string{}
	for _, i := range preferred(all) {
		s := &all[i]
		s.symbol = shortSymbol(s.Full)
		if c := s.Choice; c != "" && strings.ContainsRune("12HR", rune(c[0])) {
			s.symbol += " :" + c[:1]
		}
		if _, taken := first[s.symbol]; taken {
			s.symbol = shortSymbol(s.Full) + " :" + s.Choice
		}
		first[s.symbol] = s.Choice
	}
	return all
})

// preferred orders the settings as a symbol or number without a choice is
// understood: as tabulated, but origin choice 2 (inversion at the origin) before
// choice 1.
func preferred(all []Setting) []int {
	order := make([]int, len(all))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		if d := all[i].Number - all[j].Number; d != 0 {
			return d
		}
		return strings.Compare(originRank(all[i].Choice), originRank(all[j].Choice))
	})
	return order
}

func originRank(choice string) string {
	if strings.HasPrefix(choice, "1") {
		return "later"
	}
	return ""
}

// Symbol is the Hermann-Mauguin symbol in common use: short, but with all three
// positions for monoclinic groups, and with the choice of origin or axes where
// there are two, such as "P n m a", "P 1 21/c 1", "F d -3 m :2".
func (s Setting) Symbol() string { return s.symbol }

// Group expands the setting.
func (s Setting) Group() (*Group, error) {
	g, err := expandHall(s.Hall)
	if err != nil {
		return nil, fmt.Errorf("setting %d %s: %w", s.Number, s.Choice, err)
	}
	return g.settle(s, [3]int{}), nil
}

// shortSymbol drops from a full symbol the axes that its planes imply: all but
// the leading one of a tetragonal or hexagonal symbol. Monoclinic symbols stay
// full because the place of the axis is what tells the settings apart.
func shortSymbol(full string) string {
	f := strings.Fields(full)
	if slices.Contains(f, "1") && len(f) == 4 && !strings.HasPrefix(f[1], "3") && !strings.HasPrefix(f[1], "-3") {
		return full
	}
	cubic := len(f) > 2 && (f[2] == "3" || f[2] == "-3")
	for i := 1; i < len(f); i++ {
		axis, plane, ok := strings.Cut(f[i], "/")
		if ok && len(f) > 2 && (i > 1 || cubic || axis[0] == '2') {
			f[i] = plane
		}
	}
	return strings.Join(f, " ")
}

// shiftedHall is the Hall symbol with its origin moved by shift, in 24ths.
func (s Setting) shiftedHall(shift [3]int) string {
	if shift == ([3]int{}) || s.Hall == "" {
		return s.Hall
	}
	head, basis, moved := strings.Cut(s.Hall, " (")
	if moved {
		v, err := parseHallBasis("(" + basis)
		if err != nil {
			panic("crystal: settings.tsv: " + err.Error())
		}
		for i := range 3 {
			shift[i] += int(v.T[i])
		}
	}
	v, twelfths := Identity(), true
	for i := range 3 {
		shift[i] = mod(shift[i], Twentyfourths)
		v.T[i] = int8(shift[i])
		twelfths = twelfths && shift[i]%2 == 0
	}
	if twelfths {
		return fmt.Sprintf("%s (%d %d %d)", head, shift[0]/2, shift[1]/2, shift[2]/2)
	}
	return head + " (" + v.String() + ")"
}
