package intensity

import (
	"math"
	"slices"
	"sort"

	"thinward/analysis/crystal"
)

// rawTable numbers the different indices of a series in ascending order.
// Where the box of indices is not much larger than the data, place holds
// number+1 for every cell of the box; otherwise numbers are searched for.
type rawTable struct {
	key    []uint64
	unique []int32

	lo, size [3]int
	place    []int32
}

func pack(h, k, l int16) uint64 {
	return uint64(uint16(h)^0x8000)<<32 | uint64(uint16(k)^0x8000)<<16 | uint64(uint16(l)^0x8000)
}

func unpack(key uint64) crystal.HKL {
	part := func(shift uint) int { return int(int16(uint16(key>>shift) ^ 0x8000)) }
	return crystal.HKL{H: part(32), K: part(16), L: part(0)}
}

func newRawTable(sets []*Columns) rawTable {
	var t rawTable
	hi, rows := [3]int{math.MinInt16, math.MinInt16, math.MinInt16}, 0
	t.lo = [3]int{math.MaxInt16, math.MaxInt16, math.MaxInt16}
	for _, s := range sets {
		rows += s.Len()
		for axis, col := range [3][]int16{s.H, s.K, s.L} {
			for _, x := range col {
				t.lo[axis], hi[axis] = min(t.lo[axis], int(x)), max(hi[axis], int(x))
			}
		}
	}
	if rows == 0 {
		return rawTable{}
	}
	volume := 1
	for axis := range t.size {
		t.size[axis] = hi[axis] - t.lo[axis] + 1
		volume *= t.size[axis]
	}
	if volume <= 4*rows+1<<20 {
		t.fillBox(sets, volume)
	} else {
		t.collect(sets, rows)
	}
	return t
}

func (t *rawTable) cell(h, k, l int16) int {
	a, b, c := int(h)-t.lo[0], int(k)-t.lo[1], int(l)-t.lo[2]
	if uint(a) >= uint(t.size[0]) || uint(b) >= uint(t.size[1]) || uint(c) >= uint(t.size[2]) {
		return -1
	}
	return (a*t.size[1]+b)*t.size[2] + c
}

func (t *rawTable) fillBox(sets []*Columns, volume int) {
	t.place = make([]int32, volume)
	for _, s := range sets {
		for r := range s.I {
			t.place[t.cell(s.H[r], s.K[r], s.L[r])] = 1
		}
	}
	next := int32(0)
	for i, seen := range t.place {
		if seen == 0 {
			continue
		}
		next++
		t.place[i] = next
		c, b, a := i%t.size[2], i/t.size[2]%t.size[1], i/t.size[2]/t.size[1]
		t.key = append(t.key, pack(int16(a+t.lo[0]), int16(b+t.lo[1]), int16(c+t.lo[2])))
	}
}

func (t *rawTable) collect(sets []*Columns, rows int) {
	t.key = make([]uint64, 0, rows)
	for _, s := range sets {
		for r := range s.I {
			t.key = append(t.key, pack(s.H[r], s.K[r], s.L[r]))
		}
	}
	slices.Sort(t.key)
	t.key = slices.Clip(slices.Compact(t.key))
}

// find returns the number of an index, -1 when it is not in the table.
func (t *rawTable) find(h, k, l int16) int32 {
	if t.place != nil {
		if i := t.cell(h, k, l); i >= 0 {
			return t.place[i] - 1
		}
		return -1
	}
	key := pack(h, k, l)
	i := sort.Search(len(t.key), func(i int) bool { return t.key[i] >= key })
	if i < len(t.key) && t.key[i] == key {
		return int32(i)
	}
	return -1
}
