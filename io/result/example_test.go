package result_test

import (
	"fmt"
	"math"

	"thinward/analysis"
	"thinward/io/result"
)

// Two results are compared place by place; numbers may differ by a share of
// themselves, and not-a-number agrees with itself.
func ExampleCompare() {
	first := &analysis.Result{Schema: analysis.Schema, Contrasts: []analysis.ContrastResult{
		{Crystal: "L1", Thin: "thin", Thick: "thick", Pairs: 1500, Exchange: analysis.Exchange{M: 0.1, SE: math.NaN()}}}}
	second := &analysis.Result{Schema: analysis.Schema, Contrasts: []analysis.ContrastResult{
		{Crystal: "L1", Thin: "thin", Thick: "thick", Pairs: 1200, Exchange: analysis.Exchange{M: 0.1 * (1 + 1e-12), SE: math.NaN()}}}}
	c := result.Compare(first, second, 1e-9)
	for _, d := range c.Differences {
		fmt.Println(d.String())
	}
	// Output:
	// contrasts[L1, thin, thick].pairs: 1500 | 1200  (relative 0.2)
}

// What is written can be read back, though JSON itself knows no not-a-number.
func ExampleEncode() {
	data, err := result.Encode(&analysis.Result{Schema: analysis.Schema, Series: "Tarn", Ledger: []analysis.LedgerEntry{{Check: "dose", Value: math.NaN(), Verdict: "not known"}}})
	if err != nil {
		fmt.Println(err)
		return
	}
	back, err := result.Decode(data)
	fmt.Println(back.Series, back.Ledger[0].Check, back.Ledger[0].Value, err)
	// Output:
	// Tarn dose NaN <nil>
}
