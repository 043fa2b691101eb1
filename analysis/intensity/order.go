package intensity

import "slices"

// byIndex returns the rows in the order of h, k, l, then frame when there is
// one, then place in the list: counting sorts from the last key to the first,
// linear in rows and in the span of each key.
func byIndex(c *Columns) []int32 {
	n := c.Len()
	order, spare := make([]int32, n), make([]int32, n)
	for i := range order {
		order[i] = int32(i)
	}
	if c.Frame != nil {
		order, spare = stableByFrame(order, spare, c.Frame)
	}
	for _, key := range [][]int16{c.L, c.K, c.H} {
		order, spare = stableByInt16(order, spare, key)
	}
	return order
}

func stableByInt16(order, spare []int32, key []int16) (sorted, other []int32) {
	if len(order) == 0 {
		return order, spare
	}
	lo, hi := slices.Min(key), slices.Max(key)
	at := make([]int32, int(hi)-int(lo)+2)
	for _, k := range key {
		at[int(k)-int(lo)+1]++
	}
	for i := 1; i < len(at); i++ {
		at[i] += at[i-1]
	}
	for _, r := range order {
		k := int(key[r]) - int(lo)
		spare[at[k]] = r
		at[k]++
	}
	return spare, order
}

func stableByFrame(order, spare, frame []int32) (sorted, other []int32) {
	if len(order) == 0 {
		return order, spare
	}
	lo, hi := int64(slices.Min(frame)), int64(slices.Max(frame))
	if hi-lo > 4*int64(len(frame))+1024 {
		// Frame numbers far apart (for instance set and frame packed in one
		// number) would make the counting table larger than the data.
		slices.SortStableFunc(order, func(a, b int32) int { return int(int64(frame[a]) - int64(frame[b])) })
		return order, spare
	}
	at := make([]int32, hi-lo+2)
	for _, f := range frame {
		at[int64(f)-lo+1]++
	}
	for i := 1; i < len(at); i++ {
		at[i] += at[i-1]
	}
	for _, r := range order {
		k := int64(frame[r]) - lo
		spare[at[k]] = r
		at[k]++
	}
	return spare, order
}

// sameIndex reports whether rows a and b carry the same h, k, l.
func (c *Columns) sameIndex(a, b int32) bool {
	return c.H[a] == c.H[b] && c.K[a] == c.K[b] && c.L[a] == c.L[b]
}
