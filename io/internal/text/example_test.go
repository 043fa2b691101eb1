package text_test

import (
	"fmt"

	"thinward/io/internal/text"
)

// A number may carry its standard uncertainty in units of the last digit.
func ExampleParseNumber() {
	x, su, ok := text.ParseNumber([]byte("12.45(3)"))
	fmt.Printf("%.2f %.2f %v\n", x, su, ok)
	_, _, ok = text.ParseNumber([]byte("12,45"))
	fmt.Println(ok)
	// Output:
	// 12.45 0.03 true
	// false
}
