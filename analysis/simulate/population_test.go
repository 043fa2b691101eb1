package simulate

import (
	"context"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"thinward/analysis/internal/floatcmp"
)

func populated(seed uint64) *Plan {
	p := Sound(seed)
	p.Population, p.Structure = true, Structure{Wilson: true, B: 4}
	return p
}

// The means are those of Wilson's densities (Wilson 1949): exp(-x) for x = J/S acentric,
// exp(-x/2)/sqrt(2 pi x) centric, integrated over F = sqrt(x), which has no pole.
func TestCurbedMeansAreThoseOfWilsonsDensities(t *testing.T) {
	truth := &Truth{Centric: []bool{false, true}, Local: []float64{2, 2}, expected: []float64{1.7, 0.6}}
	for _, form := range []CurbForm{CurbIntensity, CurbStrength} {
		got := truth.curbedMeans(&Position{Curb: 0.03, CurbForm: form})
		for i, s := range truth.expected {
			u := 1.0
			if form == CurbStrength {
				u = truth.Local[i]
			}
			want := quad.Fixed(func(f float64) float64 {
				density := 2 * f * math.Exp(-f*f)
				if truth.Centric[i] {
					density = math.Sqrt(2/math.Pi) * math.Exp(-f*f/2)
				}
				j := s * f * f
				return j * math.Exp(-0.03*j/u) * density
			}, 0, 12, 200, quad.Legendre{}, 1)
			floatcmp.Check(t, form.String(), got[i], want, 1e-10, 0)
		}
	}
}

// The mean of the exchange is the same law whatever intensities were drawn, and those
// drawn scatter about it as a sample does.
func TestPopulationMeanIsThatOfTheLaw(t *testing.T) {
	var z, n float64
	for seed := range uint64(4) {
		s, err := Invent(context.Background(), populated(seed+1).WithExchange(0, 0, 1))
		if err != nil {
			t.Fatal(err)
		}
		law, sample := s.Specimens[0].Positions[2].Law, s.Truth.shellMean(s.Truth.J)
		count := map[int32]float64{}
		for i, k := range s.Truth.Shell {
			if !s.Truth.Absent[i] {
				count[k]++
			}
		}
		seen := map[int32]bool{}
		for i, k := range s.Truth.Shell {
			if s.Truth.Absent[i] || seen[k] {
				continue
			}
			seen[k] = true
			floatcmp.Check(t, "law", law[i], s.Truth.Local[i], 1e-12, 0)
			// The unit is the sample mean of a third, so it adds a little.
			d := (sample[i]/s.Truth.Local[i] - 1) * math.Sqrt(count[k])
			z, n = z+d*d, n+1
		}
	}
	if spread := math.Sqrt(z / n); !(spread > 0.85 && spread < 1.35) {
		t.Errorf("shell means scatter by %.2f of 1/sqrt(n); a sample of exponential and centric intensities by 1.0 to 1.2", spread)
	}
}

func TestPopulationNeedsALaw(t *testing.T) {
	p := Sound(1)
	p.Population = true
	if err := p.Check(); err == nil || !strings.Contains(err.Error(), "population needs structure.wilson") {
		t.Errorf("%v", err)
	}
}
