package curve

import "fmt"

// Isotonic returns the non-decreasing sequence nearest to y in the sense of
// weighted least squares, w nil = all 1 (pool adjacent violators: Ayer et al.
// 1955, Ann. Math. Stat. 26:641). For a non-increasing one, negate y and the
// result. It panics when lengths differ; a value that is not finite or a weight
// that is not positive is an error. Empty in, empty out; inputs are not changed.
func Isotonic(y, w []float64) ([]float64, error) {
	if err := checkColumn("Isotonic", y, w); err != nil {
		return nil, err
	}
	for i, v := range w {
		if !(v > 0) {
			return nil, fmt.Errorf("curve: Isotonic: weight %d is %g", i, v)
		}
	}
	type block struct {
		mean, weight float64
		n            int
	}
	var stack []block
	for i, v := range y {
		b := block{mean: v, weight: 1, n: 1}
		if w != nil {
			b.weight = w[i]
		}
		for len(stack) > 0 && stack[len(stack)-1].mean > b.mean {
			a := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			sum := a.weight + b.weight
			b.mean = a.mean + float64(b.weight/sum*(b.mean-a.mean))
			b.weight, b.n = sum, a.n+b.n
		}
		stack = append(stack, b)
	}
	out := make([]float64, 0, len(y))
	for _, b := range stack {
		for range b.n {
			out = append(out, b.mean)
		}
	}
	return out, nil
}
