package resample_test

import (
	"context"
	"fmt"

	"thinward/analysis/resample"
)

func ExampleBands() {
	s := resample.NewSeed(20260101).At("tarn", "example").Stream(0)
	y := make([]float64, 1000)
	for i := range y {
		y[i] = float64(i)/1000 + s.Normal()
	}
	windows := []resample.Window{{Lo: 0, Hi: 200}, {Lo: 400, Hi: 600}, {Lo: 800, Hi: 1000}}
	b, err := resample.Bands(context.Background(), y, nil, windows, &resample.Settings{Seed: resample.NewSeed(20260101)})
	if err != nil {
		fmt.Println(err)
		return
	}
	for g := range windows {
		fmt.Printf("%.2f between %.2f and %.2f, everywhere between %.2f and %.2f\n", b.Mean[g], b.Lo[g], b.Hi[g], b.LoSim[g], b.HiSim[g])
	}
	// Output:
	// 0.17 between 0.02 and 0.32, everywhere between -0.02 and 0.36
	// 0.49 between 0.33 and 0.65, everywhere between 0.29 and 0.69
	// 0.73 between 0.59 and 0.87, everywhere between 0.56 and 0.90
}

func ExampleFlipTest() {
	d := []float64{49, -67, 8, 16, 6, 23, 28, 41, 14, 29, 56, 24, 75, 60, -48} // Fisher 1935
	r, err := resample.FlipTest(context.Background(), d, []resample.FlipSet{{Windows: []resample.Window{{Lo: 0, Hi: len(d)}}}}, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%d of %d flips, p = %.5f\n", r.Count, r.Flips, r.P)
	// Output: 1726 of 32768 flips, p = 0.05267
}

func ExampleScalars() {
	z := []float64{8406, 2342, 8187, 8459, 4795, 3516, 4796, 10238} // Efron & Tibshirani 1993
	y := []float64{-1200, 2601, -2705, 1982, -1290, 351, -638, -2719}
	ratio := func(w []float64) ([]float64, error) {
		var a, b float64
		for i := range w {
			a += w[i] * y[i]
			b += w[i] * z[i]
		}
		return []float64{a / b}, nil
	}
	b, err := resample.Scalars(context.Background(), len(y), ratio, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.4f +- %.4f, all %d resamples\n", b.Estimate[0], b.SE[0], b.Replicates)
	// Output: -0.0713 +- 0.1023, all 6435 resamples
}
