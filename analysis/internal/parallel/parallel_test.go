package parallel

import (
	"context"
	"errors"
	"strings"
	"testing"
	"time"
)

func TestForVisitsEachOnce(t *testing.T) {
	for _, workers := range []int{0, 1, 2, 7, 200} {
		seen := make([]int, 100)
		if err := For(context.Background(), len(seen), workers, func(_ context.Context, i int) error { seen[i]++; return nil }); err != nil {
			t.Fatal(err)
		}
		for i, n := range seen {
			if n != 1 {
				t.Fatalf("workers %d: index %d visited %d times", workers, i, n)
			}
		}
	}
}

func TestForReturnsPanicAsError(t *testing.T) {
	err := For(context.Background(), 10, 2, func(_ context.Context, i int) error {
		if i == 3 {
			panic("broken thing")
		}
		return nil
	})
	var p *PanicError
	if !errors.As(err, &p) || !strings.Contains(err.Error(), "broken thing") || len(p.Stack) == 0 {
		t.Fatalf("got %v", err)
	}
}

func TestForReturnsError(t *testing.T) {
	want := errors.New("no")
	if err := For(context.Background(), 1000, 4, func(_ context.Context, i int) error {
		if i == 5 {
			return want
		}
		return nil
	}); !errors.Is(err, want) {
		t.Fatalf("got %v", err)
	}
}

func TestForStopsOnCancel(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	begin := time.Now()
	time.AfterFunc(20*time.Millisecond, cancel)
	err := For(ctx, 1<<30, 2, func(context.Context, int) error { time.Sleep(time.Millisecond); return nil })
	if !errors.Is(err, context.Canceled) {
		t.Fatalf("got %v", err)
	}
	if d := time.Since(begin); d > 5*time.Second {
		t.Fatalf("returned only after %v", d)
	}
}

func TestForNothing(t *testing.T) {
	if err := For(context.Background(), 0, 2, nil); err != nil {
		t.Fatal(err)
	}
}
