package evidence

import "math"

// Ring is the excess of one narrow band of resolution.
type Ring struct {
	D      float64 // angstrom, its centre
	Excess float64 // mean of eps in the ring less that on its flanks
	Z      float64
	N      int // pairs in the ring
}

// ringHalfWidth and flankWidth are in angstrom at 3.5 A and scale with d.
const (
	ringHalfWidth = 0.03
	flankWidth    = 0.10
	leastInRing   = 5
)

// Rings compares the differences in bands of resolution with what lies on either
// side of them. d is the spacing of each pair, eps its difference over the local
// mean and v the variance of that; rings are the centres in angstrom. A ring with
// fewer than 5 pairs in it, or on its flanks, is left out.
func Rings(d, eps, v, rings []float64) []Ring {
	var out []Ring
	inside := func(x float64) bool {
		for _, r := range rings {
			if math.Abs(x-r) < ringHalfWidth*r/3.5 {
				return true
			}
		}
		return false
	}
	for _, ring := range rings {
		half, reach := ringHalfWidth*ring/3.5, (ringHalfWidth+flankWidth)*ring/3.5
		var in, flank weighted
		for i, x := range d {
			switch gap := math.Abs(x - ring); {
			case gap < half:
				in.add(eps[i], v[i])
			case gap < reach && !inside(x):
				flank.add(eps[i], v[i])
			}
		}
		if in.n < leastInRing || flank.n < leastInRing {
			continue
		}
		e := in.mean() - flank.mean()
		out = append(out, Ring{D: ring, Excess: e, Z: e / math.Sqrt(in.variance()+flank.variance()), N: in.n})
	}
	return out
}

// weighted is a mean with weights 1/v.
type weighted struct {
	sum, weight float64
	n           int
}

func (w *weighted) add(x, v float64) {
	w.sum += x / v
	w.weight += 1 / v
	w.n++
}

func (w *weighted) mean() float64     { return w.sum / w.weight }
func (w *weighted) variance() float64 { return 1 / w.weight }
