package difference

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

// leastSignal is how many standard errors the mean intensity of a shell must
// lie above zero in both positions; a shell of noise has no strength to divide
// by.
const leastSignal = 2

// localMeans cuts the pairs into shells, leaves out those without signal and
// fills the mean columns.
func (p *Pairs) localMeans() error {
	if p.Len() < 2 {
		return fmt.Errorf("%d reflections measured in both positions; at least 2 are needed", p.Len())
	}
	count := p.source.settings.Shells
	if count <= 0 {
		count = shellCount(p.Len())
	}
	sh := intensity.EqualCountShells(p.S2, count)
	thin, okThin := shellMeans(p.Thin, p.Epsilon, sh)
	thick, okThick := shellMeans(p.Thick, p.Epsilon, sh)
	place, kept := make([]int32, sh.N), int32(0)
	for s := range place {
		place[s] = -1
		if okThin[s] && okThick[s] {
			place[s] = kept
			kept++
		}
	}
	p.Shells = int(kept)
	keep := make([]bool, p.Len())
	p.Shell = make([]int32, p.Len())
	p.MeanThin, p.MeanThick, p.MeanPooled = make([]float64, p.Len()), make([]float64, p.Len()), make([]float64, p.Len())
	for i, s := range sh.Of {
		keep[i] = place[s] >= 0
		p.Shell[i] = place[s]
		p.MeanThin[i], p.MeanThick[i] = thin[s]*p.Epsilon[i], thick[s]*p.Epsilon[i]
		p.MeanPooled[i] = 0.5 * (p.MeanThin[i] + p.MeanThick[i])
	}
	if int(kept) < sh.N {
		before := p.Len()
		for i, k := range keep {
			if !k {
				p.Counts.Thin.drop(int(p.NThin[i]))
				p.Counts.Thick.drop(int(p.NThick[i]))
			}
		}
		p.filter(keep)
		p.Counts.Unusable = before - p.Len()
		p.Warnings = append(p.Warnings, intensity.Warning{Code: "shells-without-signal", Text: fmt.Sprintf(
			"%d of %d resolution shells (%d pairs) have a mean intensity less than %d standard errors above zero and were left out", sh.N-int(kept), sh.N, before-p.Len(), leastSignal)})
	}
	p.Counts.Pairs = p.Len()
	if p.Len() < 2 {
		return fmt.Errorf("none of the %d resolution shells has a mean intensity above its noise in both positions", sh.N)
	}
	return nil
}

func (c *SideCounts) drop(n int) {
	c.Used -= n
	c.Unusable += n
}

// shellCount is the default number of shells: 75 reflections each leave the
// mean of an acentric shell uncertain by 12 %.
func shellCount(pairs int) int { return min(max(pairs/75, 1), 20) }

// shellMeans returns the mean of j/epsilon of each shell and whether it stands
// above its own scatter.
func shellMeans(j, epsilon []float64, sh *intensity.Shells) (mean []float64, signal []bool) {
	e := make([]float64, len(j))
	for i := range e {
		e[i] = j[i] / epsilon[i]
	}
	mean, n := sh.Means(e, nil)
	square := make([]float64, sh.N)
	for i, s := range sh.Of {
		if s >= 0 && !math.IsNaN(e[i]) {
			square[s] += (e[i] - mean[s]) * (e[i] - mean[s])
		}
	}
	signal = make([]bool, sh.N)
	for s := range signal {
		k := float64(n[s])
		signal[s] = mean[s] > 0 && mean[s] > leastSignal*math.Sqrt(square[s]/(k*max(k-1, 1)))
	}
	return mean, signal
}

func (p *Pairs) filter(keep []bool) {
	n := 0
	for i, k := range keep {
		if !k {
			continue
		}
		for _, col := range []*[]float64{&p.S2, &p.Epsilon, &p.Thin, &p.Thick, &p.VarThin, &p.VarThick, &p.MeanThin, &p.MeanThick, &p.MeanPooled, &p.Phi} {
			(*col)[n] = (*col)[i]
		}
		for _, col := range []*[]int32{&p.Unique, &p.NThin, &p.NThick, &p.Shell} {
			(*col)[n] = (*col)[i]
		}
		p.Centric[n] = p.Centric[i]
		n++
	}
	for _, col := range []*[]float64{&p.S2, &p.Epsilon, &p.Thin, &p.Thick, &p.VarThin, &p.VarThick, &p.MeanThin, &p.MeanThick, &p.MeanPooled, &p.Phi} {
		*col = (*col)[:n]
	}
	for _, col := range []*[]int32{&p.Unique, &p.NThin, &p.NThick, &p.Shell} {
		*col = (*col)[:n]
	}
	p.Centric = p.Centric[:n]
}
