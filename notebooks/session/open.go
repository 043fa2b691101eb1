package session

import (
	"errors"
	"os"
	"path/filepath"
	"time"

	"thinward/analysis"
	"thinward/io/manifest"
	"thinward/io/result"
)

// OutEnv names the environment variable with the folder that result.json and
// pairs.csv are written to as soon as they exist; empty means that nothing is
// written.
const OutEnv = "THINWARD_OUT"

// Names of the files of a report.
const (
	ResultFile  = "result.json"
	PartialFile = "result.partial.json"
	PairsFile   = "pairs.csv"
)

// Options are choices of a session. Zero fields mean the defaults of the
// manifest and of analysis.Settings.
type Options struct {
	Seed       int    // 0 keeps the manifest's
	Axis       string // leading strength axis; empty chooses
	Replicates int    // bootstrap draws
	Long       bool   // controls take more draws
}

// Session is one series on its way from files to answers. Its methods show
// views and stop the cell with an *Error when a step fails.
type Session struct {
	Path   string
	Title  string
	study  *analysis.Study
	result *analysis.Result
	sofar  map[string]*analysis.Result // by the last step that ran
	out    string
	timing []analysis.StepTime
	step   string
	index  int
	steps  int
}

// Open reads a manifest and its files. A relative path that is not below the
// working folder is looked for from the folders above it, so that a notebook
// finds its series wherever in the project it was opened.
func Open(path string) *Session { return OpenWith(path, Options{}) }

// OpenWith is Open with options.
func OpenWith(path string, o Options) *Session {
	set := &analysis.Settings{Axis: o.Axis, Replicates: o.Replicates, Long: o.Long}
	if err := set.CheckAxis(); err != nil {
		panic(&Error{Step: "reading", Err: err, Remedy: "Correct axis in the cell of parameters, or give --set axis=NAME."})
	}
	path = locate(path)
	s := &Session{Path: path, sofar: map[string]*analysis.Result{}, out: os.Getenv(OutEnv), step: "reading"}
	Report(Progress{Step: "reading", Text: filepath.Base(path)})
	series, err := manifest.ReadSeries(path)
	if err != nil && !exists(path) {
		panic(&Error{Step: "reading", Err: err, Remedy: "It was looked for in the working folder and those above. Write the path of your manifest into the cell of parameters, or give --set series=PATH."})
	}
	if err != nil {
		panic(&Error{Step: "reading", Err: err})
	}
	if o.Seed != 0 {
		series.Seed = uint64(o.Seed)
	}
	set.Progress = s.progress
	if s.study, err = analysis.New(*series, set); err != nil {
		panic(&Error{Step: "reading", Err: err, Remedy: "Correct " + path + "."})
	}
	s.Title = series.Title
	return s
}

func exists(path string) bool {
	_, err := os.Stat(path)
	return err == nil
}

func locate(path string) string {
	if filepath.IsAbs(path) {
		return path
	}
	at := path
	for range 8 {
		if _, err := os.Stat(at); err == nil {
			return at
		}
		at = filepath.Join("..", at)
	}
	return path
}

func (s *Session) progress(step string, done, total int) {
	Report(Progress{Step: s.step, Index: s.index, Steps: s.steps, Done: done, Total: total})
}

// Result runs every step that has not run and returns all numbers.
func (s *Session) Result() *analysis.Result {
	if s.result != nil {
		return s.result
	}
	names := s.study.StepNames()
	s.steps = len(names)
	begin := time.Now()
	at := 0
	s.announce(names, at)
	r, err := s.study.Run(Context(), func(step string, sofar *analysis.Result) error {
		now := time.Now()
		s.timing = append(s.timing, analysis.StepTime{Step: step, Seconds: now.Sub(begin).Seconds()})
		begin = now
		at++
		s.announce(names, at)
		return s.save(PartialFile, sofar)
	})
	if err != nil {
		s.fail(err)
	}
	r.Timing, r.Environment = s.timing, environment()
	if err := s.save(ResultFile, r); err != nil {
		s.fail(err)
	}
	if err := s.savePairs(); err != nil {
		s.fail(err)
	}
	s.result = r
	return r
}

func (s *Session) announce(names []string, at int) {
	if at < len(names) {
		s.step, s.index = names[at], at+1
		Report(Progress{Step: s.step, Index: s.index, Steps: s.steps})
	}
}

func (s *Session) fail(err error) {
	e := &Error{Err: err, Inside: FaultOf(err) == FaultInside}
	var step *analysis.StepError
	if errors.As(err, &step) {
		e.Step, e.Err = step.Step, step.Err
	}
	panic(e)
}

func (s *Session) save(name string, r *analysis.Result) error {
	if s.out == "" {
		return nil
	}
	data, err := result.Encode(r)
	if err != nil {
		return err
	}
	return writeWhole(filepath.Join(s.out, name), data)
}

func (s *Session) savePairs() error {
	if s.out == "" {
		return nil
	}
	path := filepath.Join(s.out, PairsFile)
	f, err := os.CreateTemp(s.out, ".pairs-*")
	if err != nil {
		return err
	}
	defer os.Remove(f.Name())
	if err := result.WritePairs(f, s.study.PairRows()); err != nil {
		f.Close()
		return err
	}
	if err := f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}

// writeWhole writes beside and renames, so that no half-written file stays.
func writeWhole(path string, data []byte) error {
	f, err := os.CreateTemp(filepath.Dir(path), ".thinward-*")
	if err != nil {
		return err
	}
	defer os.Remove(f.Name())
	if _, err := f.Write(data); err != nil {
		f.Close()
		return err
	}
	if err := f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}
