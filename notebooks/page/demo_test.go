package page

import (
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"sync"
	"testing"

	"thinward/analysis"
	"thinward/analysis/simulate"
	"thinward/io/manifest"
	"thinward/notebooks"
	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

func quoted(s string) json.RawMessage {
	b, err := json.Marshal(s)
	if err != nil {
		panic(err)
	}
	return b
}

type demo struct {
	nb   *runner.Notebook
	r    *analysis.Result
	page []byte
}

var call = regexp.MustCompile(`(?m)^\t?s\.(\w+)\(\),?$`)

// invented writes the manifest of the demo cut to low resolution, so that all
// steps run in seconds; with THINWARD_FULL set it names the demo itself.
func invented() (path string, clean func(), err error) {
	if os.Getenv("THINWARD_FULL") != "" {
		return filepath.Join("..", "..", "fixtures", "tarn", "series.toml"), func() {}, nil
	}
	dir, err := os.MkdirTemp("", "page")
	if err != nil {
		return "", nil, err
	}
	plan := simulate.Tarn()
	plan.DMin = 1.9
	err = manifest.Invent(context.Background(), plan, dir)
	return filepath.Join(dir, "series.toml"), func() { os.RemoveAll(dir) }, err
}

// executed is the report notebook with its cells run in this process and few
// draws: the page is tested, not the numbers.
var executed = sync.OnceValues(func() (*demo, error) {
	data, err := notebooks.Files.ReadFile("report.ipynb")
	if err != nil {
		return nil, err
	}
	d := &demo{}
	if d.nb, err = runner.ParseNotebook(data); err != nil {
		return nil, err
	}
	path, clean, err := invented()
	if err != nil {
		return nil, err
	}
	defer clean()
	s := session.OpenWith(path, session.Options{Replicates: 60})
	d.r = s.Result()
	for i, c := range d.nb.Cells {
		for _, m := range call.FindAllStringSubmatch(c.Source, -1) {
			method := reflect.ValueOf(s).MethodByName(m[1])
			if c.Type != "code" || !method.IsValid() || method.Type().NumIn() > 0 {
				continue
			}
			if v, ok := method.Call(nil)[0].Interface().(*session.View); ok {
				c.Count = i
				c.Outputs = append(c.Outputs, runner.Output{Type: "execute_result", Count: i, Data: map[string]json.RawMessage{"text/html": quoted(v.HTML), "text/plain": quoted(v.Plain)}})
			}
		}
	}
	d.page, err = Build(d.nb, d.r, Options{Title: s.Title, Series: s.Title, Source: "fixtures/tarn/series.toml", Command: "thinward examine fixtures/tarn/series.toml", Version: "0", Trusted: true})
	return d, err
})

func demoPage(t *testing.T) *demo {
	t.Helper()
	d, err := executed()
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// written puts a page into a file and gives its address.
func written(t *testing.T, page []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "report.html")
	if err := os.WriteFile(path, page, 0o644); err != nil {
		t.Fatal(err)
	}
	return "file://" + path
}
