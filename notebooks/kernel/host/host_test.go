package host

import (
	"context"
	"errors"
	"io"
	"strings"
	"testing"
	"testing/iotest"
	"time"
	"unicode/utf8"

	"thinward/notebooks/session"
)

const stack = `goroutine 1 [running]:
runtime/debug.Stack()
	/go/src/runtime/debug/stack.go:26 +0x5e
main.asFailure({0x1, 0x2})
	/work/notebooks/kernel/main/cell.go:100 +0x1
panic({0x1?, 0x2?})
	/go/src/runtime/panic.go:783 +0x132
thinward/analysis/size.(*Input).check(0x0)
	/somewhere/analysis/size/input.go:12 +0x1
gonum.org/v1/gonum/stat.Mean(...)
	/somewhere/stat.go:1
thinward/analysis/size.Moments({0x1, 0x2}, 0x3)
	/somewhere/analysis/size/moments.go:34 +0x2
reflect.Value.call({0x1})
	/go/src/reflect/value.go:581 +0xcc6
github.com/cosmos72/gomacro/fast.x()
	/mod/fast/call.go:1 +0x1
thinward/notebooks/kernel/main.runCell()
	/work/cell.go:1 +0x1
`

func TestDescribe(t *testing.T) {
	plain := "goroutine 1 [running]:\npanic({0x1, 0x2})\n\t/go/panic.go:1 +0x1\ngithub.com/cosmos72/gomacro/fast.x()\n\t/mod/x.go:1 +0x1\n"
	for _, c := range []struct {
		name      string
		recovered any
		stack     string
		refused   bool
		want      Failure
		trace     int
	}{
		{"data", &session.Error{Step: "intake", Err: errors.New("no rows"), Remedy: "Look."}, stack, false,
			Failure{Name: DataError, Value: "intake: no rows. Look.", Detail: Detail{Step: "intake", Remedy: "Look."}}, 1},
		{"inside", &session.Error{Step: "intake", Err: errors.New("lost"), Inside: true}, stack, false,
			Failure{Name: InsideError, Value: "intake: lost", Detail: Detail{Step: "intake", Inside: true}}, 3},
		{"cancelled step", &session.Error{Step: "scaling", Err: context.Canceled}, stack, false,
			Failure{Name: Interrupted, Value: "scaling: context canceled", Detail: Detail{Step: "scaling"}}, 1},
		{"interpreter's interrupt", "// signal: interrupt", plain, false, Failure{Name: Interrupted, Value: "interrupted"}, 1},
		{"our panic", "size: Moments: lengths differ", stack, false,
			Failure{Name: InsideError, Value: "size: Moments: lengths differ", Detail: Detail{Inside: true}}, 3},
		{"cell's panic", "mine", plain, false, Failure{Name: CodeError, Value: "mine"}, 1},
		{"refused by the compiler", "repl.go:3:7: undefined identifier: x", stack, true, Failure{Name: CodeError, Value: "line 3: undefined identifier: x"}, 1},
		{"refused import", &CodeFault{"package x"}, stack, false, Failure{Name: CodeError, Value: "package x"}, 1},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := Describe(c.recovered, []byte(c.stack), c.refused)
			if got.Name != c.want.Name || got.Value != c.want.Value || got.Detail != c.want.Detail || len(got.Traceback) != c.trace {
				t.Errorf("got %+v", got)
			}
		})
	}
	frames := ourFrames(stack)
	if len(frames) != 2 || frames[0] != "  thinward/analysis/size.(*Input).check (input.go:12)" || frames[1] != "  thinward/analysis/size.Moments (moments.go:34)" {
		t.Errorf("frames %q", frames)
	}
}

func TestCopyTextKeepsCharactersWhole(t *testing.T) {
	want := strings.Repeat("a→häß🜂", 20000)
	var got strings.Builder
	pieces := 0
	err := CopyText(func(s string) error {
		pieces++
		if !utf8.ValidString(s) {
			t.Errorf("piece %d is cut inside a character", pieces)
		}
		got.WriteString(s)
		return nil
	}, iotest.HalfReader(strings.NewReader(want)))
	if err != nil || got.String() != want {
		t.Errorf("%d bytes of %d arrived, %v", got.Len(), len(want), err)
	}
}

func TestCopyTextGathersLines(t *testing.T) {
	r, w := io.Pipe()
	go func() {
		for range 1000 {
			_, _ = io.WriteString(w, "line\n")
		}
		_ = w.Close()
	}()
	pieces, bytes := 0, 0
	if err := CopyText(func(s string) error { pieces++; bytes += len(s); return nil }, r); err != nil {
		t.Fatal(err)
	}
	if bytes != 5000 || pieces > 500 {
		t.Errorf("%d bytes in %d pieces", bytes, pieces)
	}
}

func TestCopyTextDoesNotHoldBack(t *testing.T) {
	r, w := io.Pipe()
	arrived := make(chan string, 10)
	go func() { _ = CopyText(func(s string) error { arrived <- s; return nil }, r) }()
	_, _ = io.WriteString(w, "early")
	select {
	case s := <-arrived:
		if s != "early" {
			t.Errorf("%q", s)
		}
	case <-time.After(5 * time.Second):
		t.Error("a text waits for the end")
	}
	_ = w.Close()
}

func TestCopyTextAfterAnError(t *testing.T) {
	failed := errors.New("gone")
	calls := 0
	err := CopyText(func(string) error { calls++; return failed }, strings.NewReader(strings.Repeat("x", 1<<20)))
	if !errors.Is(err, failed) || calls != 1 {
		t.Errorf("%d calls, %v", calls, err)
	}
}

func TestOffsets(t *testing.T) {
	const code = "aä→🜂z"
	for _, c := range []struct{ chars, bytes int }{{0, 0}, {1, 1}, {2, 3}, {3, 6}, {4, 10}, {5, 11}} {
		if got := ByteOffset(code, c.chars); got != c.bytes {
			t.Errorf("ByteOffset(%d) = %d, want %d", c.chars, got, c.bytes)
		}
		if got := CharOffset(code, c.bytes); got != c.chars {
			t.Errorf("CharOffset(%d) = %d, want %d", c.bytes, got, c.chars)
		}
	}
	if ByteOffset(code, 99) != len(code) || ByteOffset(code, -1) != 0 || CharOffset(code, 99) != 5 || CharOffset(code, -1) != 0 {
		t.Error("positions outside are not brought inside")
	}
}

func TestWording(t *testing.T) {
	if got := UnknownImport("x/y", []string{"a", "b"}); got != "package x/y is not in this kernel; available: a, b, and the standard library up to Go 1.13" {
		t.Error(got)
	}
	if got := Members("c", "*T", "Nope", []string{"B", "A"}); got != "c (*T) has no Nope; it has A, B" {
		t.Error(got)
	}
	if got := Members("n", "int", "Nope", nil); got != "n (int) has no Nope; it has no methods or fields" {
		t.Error(got)
	}
}
