package host_test

import (
	"fmt"

	"thinward/notebooks/kernel/host"
)

// The cursor stands among the arguments of a call.
func ExampleSubject() {
	code := "c := s.Study().Find(\"L1\", "
	fmt.Println(host.Subject(code, len(code)))
	// Output:
	// s.Study().Find
}

func ExampleByteOffset() {
	code := "größe := 3"
	fmt.Println(host.ByteOffset(code, 5), host.CharOffset(code, 7))
	// Output:
	// 7 5
}
