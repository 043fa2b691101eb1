package crystal

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

var (
	sinkHKL  HKL
	sinkBool bool
)

func benchRows(n int) (h, k, l []int16) {
	random := rand.New(rand.NewPCG(1, 2))
	h, k, l = make([]int16, n), make([]int16, n), make([]int16, n)
	for i := range n {
		h[i], k[i], l[i] = int16(random.IntN(121)-60), int16(random.IntN(121)-60), int16(random.IntN(121)-60)
	}
	return h, k, l
}

var benchSymbols = []string{"P 21 21 21", "P 31 2 1", "F d -3 m"}

func BenchmarkCanonical(b *testing.B) {
	const n = 1_000_000
	h, k, l := benchRows(n)
	for _, symbol := range benchSymbols {
		g := mustLookup(b, symbol)
		b.Run(fmt.Sprintf("rows=%d/group=%s", n, symbol), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				for i := range h {
					sinkHKL = g.Canonical(HKL{int(h[i]), int(k[i]), int(l[i])})
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/row")
		})
	}
}

func BenchmarkCanonicalKeys(b *testing.B) {
	const n = 1_000_000
	h, k, l := benchRows(n)
	keys, minus := make([]int64, n), make([]bool, n)
	for _, symbol := range benchSymbols {
		g := mustLookup(b, symbol)
		b.Run(fmt.Sprintf("rows=%d/group=%s", n, symbol), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				g.CanonicalKeys(keys, minus, h, k, l)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/row")
		})
	}
}

func BenchmarkAbsent(b *testing.B) {
	const n = 1_000_000
	h, k, l := benchRows(n)
	for _, symbol := range benchSymbols {
		g := mustLookup(b, symbol)
		b.Run(fmt.Sprintf("rows=%d/group=%s", n, symbol), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				for i := range h {
					sinkBool = g.Absent(HKL{int(h[i]), int(k[i]), int(l[i])})
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/row")
		})
	}
}

func BenchmarkLookup(b *testing.B) {
	mustLookup(b, "1")
	for _, symbol := range benchSymbols {
		b.Run("group="+symbol, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				mustLookup(b, symbol)
			}
		})
	}
}

func BenchmarkFromOperators(b *testing.B) {
	for _, symbol := range benchSymbols {
		ops := mustLookup(b, symbol).Operators()
		if _, err := FromOperators(ops); err != nil {
			b.Fatal(err)
		}
		b.Run("group="+symbol, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := FromOperators(ops); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
