package crystal

// HKL is one reflection by its Miller indices. The methods of Group that pack
// indices take each of them to lie within 50000 of zero.
type HKL struct{ H, K, L int }
