package session

import (
	"errors"

	"thinward/analysis"
)

// Steps a view can ask for. The first ones run in the order of the study; the
// others need the scale or the differences and nothing of each other.
const (
	stepIntake        = "intake"
	stepScaling       = "scaling"
	stepDifferences   = "differences"
	stepForbidden     = "forbidden"
	stepQuality       = "quality"
	stepCrystals      = "crystals"
	stepControls      = "controls"
	stepSpecification = "specification"
	stepExpectation   = "expectation"
)

// errEnough ends a run of the study at the step that was wanted.
var errEnough = errors.New("enough")

// upTo gives the numbers of one step and of all that it rests on, running what
// has not run. When all steps have run it gives everything.
func (s *Session) upTo(step string) *analysis.Result {
	if s.result != nil {
		return s.result
	}
	if r := s.sofar[step]; r != nil {
		return r
	}
	var r *analysis.Result
	switch step {
	case stepIntake, stepScaling, stepDifferences, stepCrystals:
		r = s.runTo(step)
	case stepForbidden, stepQuality:
		r = s.beside(stepScaling, step)
	case stepExpectation:
		r = s.beside(stepIntake, step)
	default:
		r = s.beside(stepDifferences, step)
	}
	s.sofar[step] = r
	return r
}

// runTo runs the steps of the study in their order until last.
func (s *Session) runTo(last string) *analysis.Result {
	names := s.study.StepNames()
	for i, name := range names {
		if name == last {
			names = names[:i+1]
			break
		}
	}
	s.steps = len(names)
	at := 0
	s.announce(names, at)
	var r *analysis.Result
	_, err := s.study.Run(Context(), func(step string, sofar *analysis.Result) error {
		at++
		s.announce(names, at)
		if step == last {
			r = sofar
			return errEnough
		}
		return nil
	})
	if err != nil && !errors.Is(err, errEnough) {
		s.fail(err)
	}
	return r
}

// beside runs one step on top of another and puts its numbers beside those.
func (s *Session) beside(base, step string) *analysis.Result {
	r := *s.upTo(base)
	s.step, s.index, s.steps = step, 0, 0
	Report(Progress{Step: step})
	var err error
	switch step {
	case stepForbidden:
		r.Forbidden, err = s.study.Forbidden(Context())
	case stepQuality:
		r.Quality, r.Distributions, err = s.study.Quality(Context())
	case stepControls:
		r.Controls, err = s.study.Controls(Context())
	case stepSpecification:
		r.Specification, err = s.study.Specification(Context())
	case stepExpectation:
		r.Expectation, err = s.study.Expectation(Context())
	}
	if err != nil {
		s.fail(&analysis.StepError{Step: step, Err: err})
	}
	return &r
}

// Study gives the analysis behind the session, for a check of one's own. Its
// methods return errors: hand them to Check.
func (s *Session) Study() *analysis.Study { return s.study }
