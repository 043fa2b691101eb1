package result

import (
	"flag"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"testing"

	"thinward/analysis"
)

var regen = flag.Bool("regen", false, "write golden files and schema.json anew")

// golden compares data with a file, or writes the file.
func golden(t *testing.T, name string, data []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *regen {
		if err := os.MkdirAll("testdata", 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, data, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if string(want) != string(data) {
		t.Errorf("%s differs from what was written; look at the change and give -regen", path)
	}
}

// whole fills every field of a Result, lists with two entries, numbers all
// different and some of them not finite.
func whole() *analysis.Result {
	r := new(analysis.Result)
	n := 0
	fill(reflect.ValueOf(r).Elem(), &n)
	r.Schema = analysis.Schema
	r.Seed = math.MaxUint64
	return r
}

func fill(v reflect.Value, n *int) {
	*n++
	switch v.Kind() {
	case reflect.Pointer:
		v.Set(reflect.New(v.Type().Elem()))
		fill(v.Elem(), n)
	case reflect.Float64:
		switch *n % 11 {
		case 3:
			v.SetFloat(math.NaN())
		case 5:
			v.SetFloat(math.Inf(1))
		case 7:
			v.SetFloat(math.Inf(-1))
		default:
			v.SetFloat(float64(*n) / 7)
		}
	case reflect.Int:
		v.SetInt(int64(*n))
	case reflect.Uint64:
		v.SetUint(uint64(*n))
	case reflect.Bool:
		v.SetBool(true)
	case reflect.String:
		v.SetString("word " + strconv.Itoa(*n) + " <&> \u00e4 \"q\"")
	case reflect.Slice:
		v.Set(reflect.MakeSlice(v.Type(), 2, 2))
		fill(v.Index(0), n)
		fill(v.Index(1), n)
	case reflect.Array:
		for i := range v.Len() {
			fill(v.Index(i), n)
		}
	case reflect.Map:
		v.Set(reflect.MakeMap(v.Type()))
		for _, k := range []string{"thin", "mean", "thick"} {
			e := reflect.New(v.Type().Elem()).Elem()
			fill(e, n)
			v.SetMapIndex(reflect.ValueOf(k), e)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			fill(v.Field(i), n)
		}
	}
}
