package analysis

import "context"

// Specification repeats m under other choices.
func (s *Study) Specification(ctx context.Context) ([]Specification, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.spec, ctx.Err()
}
