package scaling

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

// overlap says how positions hang together through common reflections.
type overlap struct {
	n         []int32   // observations a position
	common    []int32   // reflections common to positions p and q, p*P+q
	sum       []float64 // sum over those of the mean intensity in p, p*P+q
	component []int     // lowest position of the connected set
	matched   bool      // some raw index occurs in more than one position
	positions int
}

func (t *table) overlap() *overlap {
	np := len(t.curve)
	o := &overlap{n: make([]int32, np), common: make([]int32, np*np), sum: make([]float64, np*np), positions: np}
	count, total := make([]int, np), make([]float64, np)
	seen := make([]int, 0, np)
	for g := range t.id {
		for i := t.first[g]; i < t.first[g+1]; i++ {
			p := int(t.pos[i])
			if count[p] == 0 {
				seen = append(seen, p)
			}
			count[p]++
			total[p] += t.y[i]
			o.n[p]++
			if !t.rawHead[i] && t.pos[i-1] != t.pos[i] {
				o.matched = true
			}
		}
		for _, p := range seen {
			for _, q := range seen {
				o.common[p*np+q]++
				o.sum[p*np+q] += total[p] / float64(count[p])
			}
		}
		for _, p := range seen {
			count[p], total[p] = 0, 0
		}
		seen = seen[:0]
	}
	o.connect()
	return o
}

// connect labels connected sets by their lowest position.
func (o *overlap) connect() {
	o.component = make([]int, o.positions)
	for p := range o.component {
		o.component[p] = p
	}
	for changed := true; changed; {
		changed = false
		for p := range o.positions {
			for q := range o.positions {
				if o.common[p*o.positions+q] > 0 && o.component[q] < o.component[p] {
					o.component[p] = o.component[q]
					changed = true
				}
			}
		}
	}
}

// start returns ln of a first scale of every position: ratios of summed
// intensities of common reflections, along the largest overlaps.
func (o *overlap) start() []float64 {
	np := o.positions
	lnK := make([]float64, np)
	done := make([]bool, np)
	for p := range np {
		done[p] = o.component[p] == p
	}
	for {
		bp, bq, most := -1, -1, int32(0)
		for p := range np {
			for q := range np {
				if done[p] && !done[q] && o.common[p*np+q] > most {
					bp, bq, most = p, q, o.common[p*np+q]
				}
			}
		}
		if bq < 0 {
			return lnK
		}
		if r := o.sum[bq*np+bp] / o.sum[bp*np+bq]; r > 0 && !math.IsInf(r, 0) {
			lnK[bq] = lnK[bp] + math.Log(r)
		}
		done[bq] = true
	}
}

// warnings names what hangs together badly.
func (o *overlap) warnings(least int) []intensity.Warning {
	var warn []intensity.Warning
	for p := range o.positions {
		if o.n[p] == 0 {
			warn = append(warn, intensity.Warning{Code: "no-observations", Where: where(p), Text: "no observations: nothing is known of its scale"})
			continue
		}
		if o.component[p] == p && p > 0 {
			warn = append(warn, intensity.Warning{Code: "disconnected", Where: where(p),
				Text: "no reflection in common with the positions before it: its scale and B are set to those of position 0 and mean nothing"})
			continue
		}
		most := int32(0)
		for q := range o.positions {
			if q != p {
				most = max(most, o.common[p*o.positions+q])
			}
		}
		if o.positions > 1 && int(most) < least && most > 0 {
			warn = append(warn, intensity.Warning{Code: "few-overlaps", Where: where(p),
				Text: fmt.Sprintf("at most %d reflections in common with another position, fewer than %d", most, least)})
		}
	}
	return warn
}
