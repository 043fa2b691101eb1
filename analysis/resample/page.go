package resample

import (
	"fmt"
	"math"
)

// maxPageColumns is the number of columns up to which the law of a row is exact.
const maxPageColumns = 10

// Page is Page's test of an ordered trend (Page 1963, J. Am. Stat. Assoc. 58:216):
// L = sum over columns j = 1..k of j times the sum of ranks in column j, ranks
// taken within each row. rows are the blocks (crystals), columns the conditions in
// the order of the alternative (thickness); Upper is the p-value of a rise, Lower
// of a fall.
//
// Tie rule: equal values in a row get mid-ranks, and the law of L is that of
// permuting each row's own mid-ranks, independently by row. Up to ten columns it
// is exact, by convolution; beyond that Z with the same tie-corrected variance.
// Without ties this is Page's table.
//
// It is an error when there is no row, a row has fewer than two columns or another
// length than the first, or holds a NaN.
func Page(rows [][]float64) (*RankTest, error) {
	if len(rows) == 0 || len(rows[0]) < 2 {
		return nil, fmt.Errorf("resample: Page: need at least one row of two columns")
	}
	k := len(rows[0])
	r := &RankTest{N: len(rows)}
	laws := make(map[string]lattice)
	total := point(0)
	spread := float64(k*(k*k-1)) / 12 // sum over j of (j - mean)^2
	mean := float64(k+1) / 2
	for i, row := range rows {
		if len(row) != k {
			return nil, fmt.Errorf("resample: Page: row %d has %d columns, the first %d", i, len(row), k)
		}
		ranks, err := MidRanks(row)
		if err != nil {
			return nil, fmt.Errorf("resample: Page: row %d: %w", i, err)
		}
		within := 0.0
		for j, q := range ranks {
			r.Stat += float64(float64(j+1) * q)
			within += float64((q - mean) * (q - mean))
		}
		r.Expected += float64(k) * mean * mean
		r.Var += within * spread / float64(k-1)
		if k <= maxPageColumns {
			ties := tieSizes(row)
			key := fmt.Sprint(ties)
			if _, ok := laws[key]; !ok {
				laws[key] = pageRow(ties, k)
			}
			total = total.plus(laws[key])
		}
	}
	r.deviate()
	if k <= maxPageColumns {
		r.fromLattice(total, int(math.Round(2*r.Stat)))
	} else {
		r.fromNormal()
	}
	return r, nil
}

// pageRow is the law of 2 sum(j rank_j) when the mid-ranks of one row are
// permuted: columns are filled one after another, the state being the set of
// ranks used.
func pageRow(ties []int, k int) lattice {
	var twice []int
	for _, t := range ties {
		first := len(twice) + 1
		for range t {
			twice = append(twice, 2*first+t-1)
		}
	}
	most := 0
	for j := 1; j <= k; j++ {
		most += 2 * j * k
	}
	state := make([][]float64, 1<<k)
	state[0] = make([]float64, most+1)
	state[0][0] = 1
	for set := range state {
		if state[set] == nil {
			continue
		}
		column := 1
		for b := range k {
			column += set >> b & 1
		}
		if column > k {
			break
		}
		for b := range k {
			if set>>b&1 == 1 {
				continue
			}
			next := set | 1<<b
			if state[next] == nil {
				state[next] = make([]float64, most+1)
			}
			step := column * twice[b]
			for v, p := range state[set] {
				if p > 0 {
					state[next][v+step] += p / float64(k-column+1)
				}
			}
		}
		state[set] = nil
	}
	return lattice{p: state[len(state)-1]}
}
