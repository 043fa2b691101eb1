package kernel_test

import (
	"context"
	"fmt"
	"os"

	"thinward/notebooks/kernel"
)

// The second call finds what the first one built.
func ExampleEnsure() {
	path, err := kernel.Ensure(context.Background(), nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	info, err := os.Stat(path)
	fmt.Println(info.Mode().IsRegular(), err)
	again, err := kernel.Ensure(context.Background(), nil)
	fmt.Println(again == path, err)
	// Output:
	// true <nil>
	// true <nil>
}
