package resample

import (
	"context"
	"sync"

	"thinward/analysis/internal/parallel"
)

// chunk is the number of replicates handed to a worker at a time.
const chunk = 8

// eachReplicate calls do for every replicate with a scratch value that no other
// call uses at the same time.
func eachReplicate[T any](ctx context.Context, total int, s *Settings, scratch func() T, do func(t T, r int) error) error {
	var (
		free sync.Pool
		mu   sync.Mutex
		done int
	)
	return parallel.For(ctx, (total+chunk-1)/chunk, s.Workers, func(ctx context.Context, c int) error {
		t, ok := free.Get().(*T)
		if !ok {
			fresh := scratch()
			t = &fresh
		}
		defer free.Put(t)
		end := min(total, (c+1)*chunk)
		for r := c * chunk; r < end; r++ {
			if err := ctx.Err(); err != nil {
				return err
			}
			if err := do(*t, r); err != nil {
				return err
			}
		}
		if s.Progress != nil {
			mu.Lock()
			defer mu.Unlock()
			done += end - c*chunk
			s.Progress(done, total)
		}
		return nil
	})
}
