package evidence_test

import (
	"fmt"
	"math"

	"thinward/analysis/evidence"
)

// A check turns a figure into a verdict with its reason.
func ExampleOffsetOf() {
	for _, f := range []evidence.Finding{
		evidence.OffsetOf(0.004, -0.005, 0.013),
		evidence.OffsetOf(0.08, 0.06, 0.10),
		evidence.OffsetOf(math.NaN(), math.NaN(), math.NaN()),
	} {
		fmt.Println(f.Verdict)
	}
	fmt.Println(evidence.Worse(evidence.Caution, evidence.Fine))
	// Output:
	// fine
	// fails
	// not known
	// caution
}
