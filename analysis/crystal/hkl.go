package crystal

// HKL is one reflection by its Miller indices.
type HKL struct{ H, K, L int }
