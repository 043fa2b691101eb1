package intensity

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestEqualCountShells(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 3))
	s2 := make([]float64, 1003)
	for i := range s2 {
		s2[i] = r.Float64()
	}
	before := fmt.Sprint(s2)
	sh := EqualCountShells(s2, 10)
	if sh.N != 10 || len(sh.Edges) != 11 {
		t.Fatalf("%d shells, %d edges", sh.N, len(sh.Edges))
	}
	count := make([]int, 10)
	for i, k := range sh.Of {
		count[k]++
		if s2[i] < sh.Edges[k] || s2[i] > sh.Edges[k+1] {
			t.Fatalf("%g lies in shell %d of %g to %g", s2[i], k, sh.Edges[k], sh.Edges[k+1])
		}
	}
	for k, n := range count {
		if n < 100 || n > 101 {
			t.Errorf("shell %d holds %d", k, n)
		}
	}
	if fmt.Sprint(s2) != before {
		t.Error("s2 was changed")
	}
}

func TestEqualCountShellsEdges(t *testing.T) {
	if sh := EqualCountShells(nil, 5); sh.N != 0 || sh.Find(1) != -1 {
		t.Errorf("no reflections: %+v", sh)
	}
	if sh := EqualCountShells([]float64{2, 2, 2, 2}, 3); sh.N != 1 || fmt.Sprint(sh.Of) != "[0 0 0 0]" {
		t.Errorf("all equal: %+v", sh)
	}
	sh := EqualCountShells([]float64{1, 1, 1, 2, math.NaN()}, 2)
	if sh.N != 1 || fmt.Sprint(sh.Of) != "[0 0 0 0 -1]" {
		t.Errorf("ties at the cut: %+v", sh)
	}
	sh = EqualCountShells([]float64{1, 2, 3, 4}, 0)
	if sh.N != 1 || sh.Find(0.9) != -1 || sh.Find(4) != 0 || sh.Find(4.1) != -1 {
		t.Errorf("no number: %+v", sh)
	}
	long, short := EqualCountShells([]float64{0.01, 0.25}, 1).Spacing(0)
	floatcmp.Check(t, "long", long, 5, 0, 1e-14)
	floatcmp.Check(t, "short", short, 1, 0, 1e-14)
}

func TestShellMeans(t *testing.T) {
	sh := EqualCountShells([]float64{1, 4, 2, 3}, 2)
	mean, n := sh.Means([]float64{10, 40, 20, math.NaN()}, nil)
	floatcmp.CheckSlice(t, "means", mean, []float64{15, 40}, 0, 1e-15)
	if fmt.Sprint(n) != "[2 1]" {
		t.Errorf("n = %v", n)
	}
	mean, n = sh.Means([]float64{10, 40, 20, 5}, []float64{3, 0, 1, 0})
	floatcmp.CheckSlice(t, "weighted means", mean, []float64{12.5, math.NaN()}, 0, 1e-15)
	if fmt.Sprint(n) != "[2 0]" {
		t.Errorf("n = %v", n)
	}
	defer func() {
		if got := recover(); got != "intensity: Shells.Means: values are not parallel to the shells" {
			t.Errorf("panic %v", got)
		}
	}()
	sh.Means([]float64{1}, nil)
}
