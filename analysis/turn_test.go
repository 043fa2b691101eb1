package analysis

import (
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

func TestOneTurn(t *testing.T) {
	for _, c := range []struct {
		name    string
		in      [][]float64
		want    [][]float64
		changed bool
	}{
		{"one way of counting", [][]float64{{-55, 0, 55}, {-50, 60}}, [][]float64{{-55, 0, 55}, {-50, 60}}, false},
		{"one position from 0 to 360", [][]float64{{-55, 0, 55}, {305, 0, 60}}, [][]float64{{-55, 0, 55}, {-55, 0, 60}}, true},
		{"all positions from 0 to 360", [][]float64{{300, 350, 10}, {301, 20}}, [][]float64{{-60, -10, 10}, {-59, 20}}, true},
		{"a second scan counted on", [][]float64{{-50, 50, 310, 410}}, [][]float64{{-50, 50, -50, 50}}, true},
		{"about the far side", [][]float64{{130, 180, 220}, {-140, -180, 140}}, [][]float64{{130, 180, 220}, {220, 180, 140}}, true},
		{"a whole turn has no place to cut", [][]float64{{0, 25, 50, 75, 100, 125, 150, 175, 200, 225, 250, 275, 300, 325, 350}}, [][]float64{{0, 25, 50, 75, 100, 125, 150, 175, 200, 225, 250, 275, 300, 325, 350}}, false},
		{"no angles", [][]float64{nil, nil}, [][]float64{nil, nil}, false},
	} {
		var list []Accepted
		for _, phi := range c.in {
			list = append(list, Accepted{Observations: &intensity.Columns{Phi: append([]float64(nil), phi...)}})
		}
		before := list[0].Observations
		if text := oneTurn(list); (text != "") != c.changed {
			t.Errorf("%s: said %q", c.name, text)
		}
		for i := range list {
			floatcmp.CheckSlice(t, c.name, list[i].Observations.Phi, c.want[i], 1e-12, 0)
		}
		floatcmp.CheckSlice(t, c.name+": the columns given", before.Phi, c.in[0], 0, 0)
	}
}
