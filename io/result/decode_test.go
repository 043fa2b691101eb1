package result

import (
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
)

func TestDecodeRefuses(t *testing.T) {
	for _, c := range []struct{ name, in, want string }{
		{"no JSON", "thin", "this is not JSON"},
		{"empty", "", "this is not JSON"},
		{"list", "[]", "does not hold an object"},
		{"no schema", "{}", `names no schema`},
		{"higher major", `{"schema": "thinward.result/2"}`, `"thinward.result/2", which a newer version wrote`},
		{"other schema", `{"schema": "other/1"}`, `"other/1"`},
		{"two values", `{"schema": "thinward.result/1"} {}`, "more than one value"},
		{"word for number", `{"schema": "thinward.result/1", "contrasts": [{"exchange": {"m": "much"}}]}`, "contrasts[0].exchange.m holds string"},
		{"fraction for count", `{"schema": "thinward.result/1", "contrasts": [{"pairs": 1.5}]}`, "contrasts[0].pairs"},
		{"negative seed", `{"schema": "thinward.result/1", "seed": -1}`, "seed"},
		{"short array", `{"schema": "thinward.result/1", "contrasts": [{"thickness_nm": [1]}]}`, "contrasts[0].thickness_nm"},
		{"object for list", `{"schema": "thinward.result/1", "ledger": {}}`, "ledger"},
		{"number for word", `{"schema": "thinward.result/1", "series": 1}`, "series"},
		{"null for a list", `{"schema": "thinward.result/1", "inputs": null}`, "inputs"},
		{"null list entry", `{"schema": "thinward.result/1", "ledger": [null]}`, "ledger[0]"},
	} {
		if r, err := Decode([]byte(c.in)); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, %v; want an error with %q", c.name, r, err, c.want)
		}
	}
}

func TestDecodePassesOverUnknown(t *testing.T) {
	got, err := Decode([]byte(`{"schema": "thinward.result/1", "series": "s", "later": [1, {"a": null}]}`))
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(&analysis.Result{Schema: analysis.Schema, Series: "s"}, got, cmpopts.EquateEmpty()); diff != "" {
		t.Error(diff)
	}
}

func FuzzDecode(f *testing.F) {
	data, err := Encode(whole())
	if err != nil {
		f.Fatal(err)
	}
	f.Add(data)
	f.Add([]byte(`{"schema": "thinward.result/1", "naive": {}}`))
	f.Add([]byte(`{"schema": "thinward.result/1", "contrasts": [{"naive": {"thin": {"score": null}}}]}`))
	f.Fuzz(func(t *testing.T, data []byte) {
		r, err := Decode(data)
		if err != nil {
			return
		}
		first, err := Encode(r)
		if err != nil {
			t.Fatalf("what was read cannot be written: %v", err)
		}
		second, err := Decode(first)
		if err != nil {
			t.Fatalf("what was written cannot be read: %v", err)
		}
		if c := Compare(r, second, 0); !c.Identical {
			t.Fatalf("changed on the way: %v", c.Differences)
		}
	})
}
