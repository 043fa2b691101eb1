package simulate

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/crystal"
)

func lookup(t testing.TB, symbol string) *crystal.Group {
	t.Helper()
	g, err := crystal.Lookup(symbol)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

func invent(t testing.TB, p *Plan) *Series {
	t.Helper()
	s, err := Invent(context.Background(), p)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// small is one crystal with two positions, 300 unique reflections, no noise and no effect.
func small() *Plan {
	return &Plan{
		Seed: 11, DMin: 1.5, Cell: Cell{A: 10, B: 12, C: 14},
		Common:   Position{ThicknessNM: 100, Noiseless: true},
		Crystals: []Crystal{{Positions: []Position{{Name: "thin"}, {Name: "thick"}}}},
	}
}

func meanSD(x []float64) (mean, sd float64) {
	for _, v := range x {
		mean += v
	}
	mean /= float64(len(x))
	for _, v := range x {
		sd += (v - mean) * (v - mean)
	}
	return mean, math.Sqrt(sd / float64(len(x)-1))
}

func correlation(x, y []float64) float64 {
	mx, sx := meanSD(x)
	my, sy := meanSD(y)
	sum := 0.0
	for i := range x {
		sum += (x[i] - mx) * (y[i] - my)
	}
	return sum / (sx * sy * float64(len(x)-1))
}
