package result

import (
	"bytes"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
)

func TestRoundTrip(t *testing.T) {
	for name, r := range map[string]*analysis.Result{"whole": whole(), "empty": {Schema: analysis.Schema}} {
		data, err := Encode(r)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		got, err := Decode(data)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if diff := cmp.Diff(r, got, cmpopts.EquateNaNs(), cmpopts.EquateEmpty()); diff != "" {
			t.Errorf("%s (-want +got):\n%s", name, diff)
		}
		again, err := Encode(got)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(data, again) {
			t.Errorf("%s: a second pass gives other bytes", name)
		}
	}
}

func TestGoldenBytes(t *testing.T) {
	data, err := Encode(&analysis.Result{
		Schema: analysis.Schema, Series: "Tarn <peptide> \u00e4", Seed: math.MaxUint64,
		Inputs: []analysis.InputResult{{Path: "L1-thin.cif.gz", SHA256: "00ff", Crystal: "L1", Position: "thin", Rows: 3570, Observations: 2294, SetAside: map[string]int{"sigma": 2, "null": 1}}},
		Forbidden: []analysis.Forbidden{
			{Crystal: "L1", Position: "thin", Element: "all", N: 12, Ratio: 1.0 / 3, SU: 1e-7, Z: math.Inf(-1), MeanIS: 3},
			{Crystal: "L1", Position: "thick", Element: "all", Ratio: math.NaN(), SU: math.Inf(1), Why: "the list has none"},
		},
		Thickness:   &analysis.ThicknessResult{Lines: []analysis.ThicknessLine{}, Why: "one thickness"},
		Environment: &analysis.Environment{Go: "go0", Thinward: "0", Modules: map[string]string{"b": "2", "a": "1"}},
		Timing:      []analysis.StepTime{{Step: "intake", Seconds: 0.25}},
	})
	if err != nil {
		t.Fatal(err)
	}
	golden(t, "small.json", data)
}

// The standard library reads the file too, once its numbers are no surprise.
func TestIsJSON(t *testing.T) {
	data, err := Encode(whole())
	if err != nil {
		t.Fatal(err)
	}
	if !json.Valid(data) {
		t.Error("the standard library does not take it for JSON")
	}
	if bytes.Contains(data, []byte("NaN")) || bytes.Contains(data, []byte("Inf")) {
		t.Error("holds a number that JSON does not have")
	}
}

func TestKeyOrder(t *testing.T) {
	data, err := Encode(whole())
	if err != nil {
		t.Fatal(err)
	}
	d := json.NewDecoder(bytes.NewReader(data))
	var keys []string
	depth, isKey := 0, true
	for {
		token, err := d.Token()
		if err != nil {
			break
		}
		switch v := token.(type) {
		case json.Delim:
			if v == '{' || v == '[' {
				depth++
			} else {
				depth--
			}
			isKey = depth == 1
		case string:
			if depth == 1 && isKey {
				keys = append(keys, v)
				isKey = false
				continue
			}
			isKey = depth == 1
		default:
			isKey = depth == 1
		}
	}
	want := []string{"schema", "series", "seed", "inputs", "intake", "indexing", "scaling", "contrasts", "forbidden", "crystals", "thickness",
		"controls", "ledger", "specification", "expectation", "matters", "answers", "warnings", "environment", "timing"}
	var known []string
	for _, k := range keys {
		for _, w := range want {
			if k == w {
				known = append(known, k)
			}
		}
	}
	if diff := cmp.Diff(want, known); diff != "" {
		t.Errorf("order of the keys (-want +got):\n%s", diff)
	}
	if keys[0] != "schema" || keys[len(keys)-2] != "environment" || keys[len(keys)-1] != "timing" {
		t.Errorf("schema is not first, or environment and timing not last: %v", keys)
	}
}

func TestNumbers(t *testing.T) {
	type numbers struct {
		F []float64 `json:"f"`
		I int       `json:"i"`
	}
	var b bytes.Buffer
	in := numbers{F: []float64{0.1, 1e-300, 1e300, math.NaN(), math.Inf(1), math.Inf(-1), 0, 3}, I: -4}
	if err := EncodeAny(&b, in); err != nil {
		t.Fatal(err)
	}
	want := "{\n  \"f\": [0.1, 1e-300, 1e+300, null, \"inf\", \"-inf\", 0, 3],\n  \"i\": -4\n}\n"
	if b.String() != want {
		t.Errorf("got %s, want %s", b.String(), want)
	}
}

func TestEncodeRefuses(t *testing.T) {
	if _, err := Encode(nil); err == nil || err.Error() != "result: nothing to encode" {
		t.Errorf("nil: %v", err)
	}
	err := EncodeAny(new(bytes.Buffer), struct{ C chan int }{})
	if err == nil || !strings.Contains(err.Error(), "of kind chan cannot be written") {
		t.Errorf("channel: %v", err)
	}
}
