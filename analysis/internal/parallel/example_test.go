package parallel_test

import (
	"context"
	"fmt"

	"thinward/analysis/internal/parallel"
)

// Every item writes its own place, so the result does not depend on the workers.
func ExampleFor() {
	squares := make([]int, 6)
	err := parallel.For(context.Background(), len(squares), 3, func(_ context.Context, i int) error {
		squares[i] = i * i
		return nil
	})
	fmt.Println(squares, err)

	err = parallel.For(context.Background(), 2, 2, func(_ context.Context, i int) error {
		if i == 1 {
			return fmt.Errorf("item %d has no rows", i)
		}
		return nil
	})
	fmt.Println(err)
	// Output:
	// [0 1 4 9 16 25] <nil>
	// item 1 has no rows
}
