package resample

// RankTest is the outcome of a rank or sign test. Upper and Lower are the
// one-sided p-values, P the two-sided one, min(1, 2 min(Upper, Lower)) unless the
// test says otherwise. Z is the normal deviate with ties allowed for. Exact: the
// p-values are exact tail probabilities, otherwise normal ones.
type RankTest struct {
	Stat, Expected, Var, Z float64
	Upper, Lower, P        float64
	// Smallest is the smallest two-sided p-value that so many units can give.
	Smallest float64
	N        int
	Exact    bool
}
