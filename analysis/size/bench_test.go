package size

import (
	"fmt"
	"testing"
)

func BenchmarkMoments(b *testing.B) {
	for _, n := range []int{2000, 20000} {
		in := plan{n: n, shells: 12, falloff: 9, m: .05, noise: [3]float64{.03, .03, .03}, error: .1}.draw(stream(1))
		for _, model := range []Model{M, MQ, MQO} {
			b.Run(fmt.Sprintf("pairs=%d/model=%s", n, model), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					if _, err := Moments(in, nil, model, nil); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
		b.Run(fmt.Sprintf("pairs=%d/exchange", n), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Exchange(in, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
