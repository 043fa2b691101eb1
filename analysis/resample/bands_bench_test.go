package resample

import (
	"context"
	"fmt"
	"testing"
)

func gridWindows(n, width, grid int) []Window {
	out := make([]Window, grid)
	for g := range out {
		c := 0
		if grid > 1 {
			c = g * (n - 1) / (grid - 1)
		}
		out[g] = Window{max(0, c-width/2), min(n, c+width/2+1)}
	}
	return out
}

func normals(n int, seed uint64) []float64 {
	s := NewSeed(seed).At("test normals").Stream(0)
	y := make([]float64, n)
	for i := range y {
		y[i] = s.Normal()
	}
	return y
}

var sinkBands *BandSet

func BenchmarkBands(b *testing.B) {
	for _, n := range []int{10000, 100000} {
		y := normals(n, 1)
		w := make([]float64, n)
		for i := range w {
			w[i] = 1 + y[i]*y[i]
		}
		win := gridWindows(n, n/50, 200)
		for _, weighted := range []bool{false, true} {
			name, weights := fmt.Sprintf("pairs=%d", n), []float64(nil)
			if weighted {
				name, weights = name+"/weighted=true", w
			}
			b.Run(name, func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					var err error
					if sinkBands, err = Bands(context.Background(), y, weights, win, nil); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
