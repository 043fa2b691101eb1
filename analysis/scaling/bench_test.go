package scaling

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"testing"
)

// wide makes a large invented crystal quickly: n observations in 3 positions,
// concatenated by position as they would be read.
func wide(n int) Input {
	rng := rand.New(rand.NewPCG(9, 9))
	const positions, mates = 3, 4
	unique := max(1, n/(positions*mates))
	total := unique * mates * positions
	in := Input{Positions: positions}
	s2, j, phi := make([]float64, unique), make([]float64, unique), make([]float64, unique*mates)
	for h := range s2 {
		s := 0.5 * math.Cbrt(rng.Float64())
		s2[h] = s * s
		j[h] = 100 * math.Exp(-8*s2[h]) * rng.ExpFloat64()
	}
	for r := range phi {
		phi[r] = 120*rng.Float64() - 60
	}
	in.S2, in.I, in.Var, in.Phi = make([]float64, 0, total), make([]float64, 0, total), make([]float64, 0, total), make([]float64, 0, total)
	in.Unique, in.Raw, in.Position = make([]int32, 0, total), make([]int32, 0, total), make([]int32, 0, total)
	for p := range positions {
		for r := range phi {
			h := r / mates
			g := math.Exp(0.3*float64(p) + 0.2*math.Cos(phi[r]/20+float64(p)) - float64(p)*s2[h])
			mean := g * j[h]
			v := mean + 20 + 0.01*mean*mean
			y := mean + math.Sqrt(v)*rng.NormFloat64()
			in.S2 = append(in.S2, s2[h])
			in.I = append(in.I, y)
			in.Var = append(in.Var, math.Max(y, 0)+20)
			in.Phi = append(in.Phi, phi[r]+0.1*rng.NormFloat64())
			in.Unique = append(in.Unique, int32(h))
			in.Raw = append(in.Raw, int32(r))
			in.Position = append(in.Position, int32(p))
		}
	}
	return in
}

var sink *Fit

func BenchmarkScale(b *testing.B) {
	for _, n := range []int{30000, 300000, 3000000} {
		b.Run(fmt.Sprintf("observations=%d", n), func(b *testing.B) {
			in := wide(n)
			runtime.GC()
			b.ReportAllocs()
			b.ResetTimer()
			for range b.N {
				f, err := Estimate(context.Background(), in, nil)
				if err != nil {
					b.Fatal(err)
				}
				if !f.Converged {
					b.Fatal("not converged")
				}
				sink = f
			}
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			b.ReportMetric(float64(m.HeapSys)/float64(in.Len()), "heapB/obs")
			b.ReportMetric(float64(sink.Iterations), "rounds")
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(in.Len()), "ns/obs")
		})
	}
}

var noiseSink *Noise

func BenchmarkNoise(b *testing.B) {
	for _, n := range []int{30000, 3000000} {
		b.Run(fmt.Sprintf("observations=%d", n), func(b *testing.B) {
			in := wide(n)
			f, err := Estimate(context.Background(), in, nil)
			if err != nil {
				b.Fatal(err)
			}
			b.ReportAllocs()
			b.ResetTimer()
			for range b.N {
				if noiseSink, err = FitNoise(context.Background(), in, f, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
