package text

// Grown returns x with length n, copied only when its capacity is too small. What
// lies behind the old length is not defined.
func Grown[T any](x []T, n int) []T {
	if cap(x) >= n {
		return x[:n]
	}
	y := make([]T, n)
	copy(y, x)
	return y
}

// Cut returns the first n of x, in memory of its own when much would be held for
// nothing; nil stays nil.
func Cut[T any](x []T, n int) []T {
	if x == nil {
		return nil
	}
	if cap(x) > n+n/4+64 {
		return append(make([]T, 0, n), x[:n]...)
	}
	return x[:n:n]
}
