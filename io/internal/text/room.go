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

// Room estimates the number of rows of a text of total bytes of which the first read
// hold n rows, n and read above 0: 5 % more than in proportion, as the first rows are
// not like all, and always more than n.
func Room(n, read, total int) int {
	return max(n+n/16, int(float64(total)/float64(read)*float64(n)*1.05)) + 64
}
