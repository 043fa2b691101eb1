package load_test

import (
	"context"
	"fmt"

	"thinward/notebooks/bindings/load"
)

func ExamplePackages() {
	set, err := load.Packages(context.Background(), ".", "sort")
	if err != nil {
		fmt.Println(err)
		return
	}
	p, err := set.Import("sort")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(set.Named(), set.Standard("sort"), p.Scope().Lookup("Ints"))
	// Output:
	// [sort] true func sort.Ints(x []int)
}
