package intensity

import (
	"fmt"
	"math"
)

// Check refuses observations that cannot be merged into n unique reflections:
// unequal lengths, Unique outside 0..n-1, an intensity that is not finite, a
// variance that is not above zero (+Inf is allowed and means no weight), a Phi
// that is not finite. Raw is only looked at for its length.
func (s *Scaled) Check(n int) error {
	m := len(s.I)
	if len(s.Unique) != m || len(s.Raw) != m || len(s.Var) != m || (s.Phi != nil && len(s.Phi) != m) {
		return fmt.Errorf("observations differ in length: %d unique, %d raw, %d intensity, %d variance, %d phi", len(s.Unique), len(s.Raw), m, len(s.Var), len(s.Phi))
	}
	for o, u := range s.Unique {
		switch {
		case u < 0 || int(u) >= n:
			return &RowError{o, "unique", fmt.Sprintf("%d lies outside 0 to %d", u, n-1)}
		case !finite(s.I[o]):
			return &RowError{o, "intensity", fmt.Sprintf("%g is not a finite number", s.I[o])}
		case !(s.Var[o] > 0):
			return &RowError{o, "variance", fmt.Sprintf("%g is not above zero", s.Var[o])}
		case s.Phi != nil && !finite(s.Phi[o]):
			return &RowError{o, "phi", fmt.Sprintf("%g is not a finite number", s.Phi[o])}
		}
	}
	return nil
}

// Merge returns the inverse-variance mean of each of n unique reflections:
//
//	J = sum I/v / sum 1/v,  Var = 1 / sum 1/v
//
// with v the given variance, which must be the one at the expected intensity:
// weights from observed counts pull weak reflections down. Observations with
// v = +Inf carry no weight and are not counted. Merge panics on what
// Scaled.Check refuses; sums run in the order of the observations.
func Merge(n int, s *Scaled) *Merged {
	if err := s.Check(n); err != nil {
		panic("intensity: Merge: " + err.Error())
	}
	return mergePart(n, s, nil, 0)
}

// mergePart merges the observations whose entry of half equals which, or all
// of them when half is nil.
func mergePart(n int, s *Scaled, half []uint8, which uint8) *Merged {
	m := &Merged{J: make([]float64, n), Var: make([]float64, n), N: make([]int32, n)}
	for o, u := range s.Unique {
		if (half != nil && half[o] != which) || math.IsInf(s.Var[o], 1) {
			continue
		}
		w := 1 / s.Var[o]
		m.J[u] += w * s.I[o]
		m.Var[u] += w
		m.N[u]++
	}
	for u := range m.J {
		if m.N[u] == 0 {
			m.Var[u] = math.Inf(1)
			continue
		}
		m.J[u] /= m.Var[u]
		m.Var[u] = 1 / m.Var[u]
	}
	return m
}

// MergeOrdinary returns the plain mean of each unique reflection and the
// variance that the given variances of its observations make of it; for
// comparison with Merge, which it equals when all variances are the same.
func MergeOrdinary(n int, s *Scaled) *Merged {
	if err := s.Check(n); err != nil {
		panic("intensity: MergeOrdinary: " + err.Error())
	}
	m := &Merged{J: make([]float64, n), Var: make([]float64, n), N: make([]int32, n)}
	for o, u := range s.Unique {
		m.J[u] += s.I[o]
		m.Var[u] += s.Var[o]
		m.N[u]++
	}
	for u, k := range m.N {
		if k == 0 {
			m.Var[u] = math.Inf(1)
			continue
		}
		m.J[u] /= float64(k)
		m.Var[u] /= float64(k) * float64(k)
	}
	return m
}
