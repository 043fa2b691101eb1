package analysis

import "context"

// Controls runs the pipeline on data where the answer is known.
func (s *Study) Controls(ctx context.Context) ([]ControlResult, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.controls, ctx.Err()
}

// Specification repeats m under other choices.
func (s *Study) Specification(ctx context.Context) ([]Specification, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.spec, ctx.Err()
}
