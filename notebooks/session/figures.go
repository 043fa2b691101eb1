package session

func notDrawn(title string) *View { return &View{Title: title, Plain: title} }

// ByStrength shows thin minus thick against strength: the primary contrast of
// every crystal first, the other contrasts to choose.
func (s *Session) ByStrength() *View { return notDrawn("Differences against strength") }

// Naive shows the same differences against the measured intensities, each with
// the ghost that noise alone draws there.
func (s *Session) Naive() *View { return notDrawn("Naive axes") }

// ByResolution shows the logarithm of the ratio of both positions by resolution.
func (s *Session) ByResolution() *View { return notDrawn("Differences against resolution") }

// Pairs shows every pair of the primary contrasts, dI against strength.
func (s *Session) Pairs() *View { return notDrawn("Pairs") }

// ScaleCurves shows ln K against the rotation angle.
func (s *Session) ScaleCurves() *View { return notDrawn("Scale curves") }

// SizesFigure shows the exchange of every contrast with its interval.
func (s *Session) SizesFigure() *View { return notDrawn("Sizes") }

// ThicknessFigure shows mu against thickness, a line a crystal.
func (s *Session) ThicknessFigure() *View { return notDrawn("Thickness") }

// SpecificationFigure shows m under every other choice.
func (s *Session) SpecificationFigure() *View { return notDrawn("Specification") }

// ForbiddenFigure shows the forbidden reflections against thickness.
func (s *Session) ForbiddenFigure() *View { return notDrawn("Forbidden reflections") }

// BudgetFigure shows what becomes of the electrons at each thickness.
func (s *Session) BudgetFigure() *View { return notDrawn("Scattering budget") }
