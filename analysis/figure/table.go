package figure

// tableRows bounds the rows that one curve takes in a table, sharedRows those of
// each of several.
const (
	tableRows  = 25
	sharedRows = 12
)

// table writes the drawn points of all panels, long curves thinned evenly.
func (l *layout) table(title string, panels []Panel) *Table {
	t := &Table{Caption: title}
	var hasName, hasBand, hasSim, hasCurve bool
	for _, p := range panels {
		hasName = hasName || p.Name != ""
		for _, c := range p.Curves {
			hasBand, hasSim = hasBand || c.Lo != nil, hasSim || c.LoSim != nil
			hasCurve = hasCurve || len(p.Curves) > 1 && c.Name != ""
		}
	}
	add := func(head string, words bool) { t.Head, t.Words = append(t.Head, head), append(t.Words, words) }
	if hasName {
		add("panel", true)
	}
	if hasCurve {
		add("curve", true)
	}
	add(l.p.X.name("x"), false)
	add(l.p.Y.name("y"), false)
	if hasBand {
		add("low", false)
		add("high", false)
	}
	if hasSim {
		add("low, simultaneous", false)
		add("high, simultaneous", false)
	}
	bound := tableRows
	if hasCurve || len(panels) > 1 {
		bound = sharedRows
	}
	for i := range panels {
		for j := range panels[i].Curves {
			c := &panels[i].Curves[j]
			for _, k := range thin(c.X, bound) {
				var row []string
				if hasName {
					row = append(row, panels[i].Name)
				}
				if hasCurve {
					row = append(row, c.Name)
				}
				row = append(row, Number(c.X[k]), Number(c.Y[k]))
				if hasBand {
					row = append(row, cellOf(c.Lo, k), cellOf(c.Hi, k))
				}
				if hasSim {
					row = append(row, cellOf(c.LoSim, k), cellOf(c.HiSim, k))
				}
				t.Rows = append(t.Rows, row)
			}
		}
	}
	return t
}

func cellOf(v []float64, i int) string {
	if v == nil {
		return "\u2013"
	}
	return Number(v[i])
}

// thin chooses at most n indices, first and last among them, places that repeat
// the one before left out.
func thin(x []float64, n int) []int {
	var all []int
	for i := range x {
		if i == 0 || x[i] != x[i-1] {
			all = append(all, i)
		}
	}
	if len(all) <= n {
		return all
	}
	out := make([]int, n)
	for i := range out {
		out[i] = all[i*(len(all)-1)/(n-1)]
	}
	return out
}
