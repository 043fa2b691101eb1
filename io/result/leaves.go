package result

import (
	"math"
	"reflect"
	"sort"
	"strconv"
	"strings"

	"thinward/analysis"
)

// Leaf is one number or word of a result with its place, such as
// "contrasts[L1, thin, thick].exchange.m". Number is NaN for a word and for a
// number that is not one.
type Leaf struct {
	Path     string
	IsNumber bool
	Number   float64
	Text     string // of a word
}

// naming are the fields that tell the entries of a list apart, so that two
// results of different length are compared entry by entry.
var naming = []string{
	"path", "crystal", "thick_crystal", "position", "thin", "thick", "element", "control", "check", "where", "choice", "level",
	"axis", "model", "form", "without", "question", "code", "step",
}

// Leaves lists all numbers and words of r in the order of the file, environment
// and timing left out: they differ from run to run. A nil r has none.
func Leaves(r *analysis.Result) []Leaf {
	if r == nil {
		return nil
	}
	short := *r
	short.Environment, short.Timing = nil, nil
	var out []Leaf
	collect(&out, reflect.ValueOf(short), "")
	return out
}

func collect(out *[]Leaf, v reflect.Value, path string) {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			collect(out, v.Elem(), path)
		}
	case reflect.Float64:
		*out = append(*out, Leaf{Path: path, IsNumber: true, Number: v.Float()})
	case reflect.Int:
		*out = append(*out, Leaf{Path: path, IsNumber: true, Number: float64(v.Int())})
	case reflect.Uint64:
		*out = append(*out, Leaf{Path: path, Number: math.NaN(), Text: strconv.FormatUint(v.Uint(), 10)})
	case reflect.Bool:
		*out = append(*out, Leaf{Path: path, Number: math.NaN(), Text: strconv.FormatBool(v.Bool())})
	case reflect.String:
		*out = append(*out, Leaf{Path: path, Number: math.NaN(), Text: v.String()})
	case reflect.Slice, reflect.Array:
		seen := map[string]int{}
		for i := range v.Len() {
			name := nameOf(v.Index(i))
			if name == "" {
				name = strconv.Itoa(i)
			}
			if seen[name]++; seen[name] > 1 {
				name += " #" + strconv.Itoa(seen[name])
			}
			collect(out, v.Index(i), path+"["+name+"]")
		}
	case reflect.Map:
		keys := v.MapKeys()
		sort.Slice(keys, func(i, j int) bool { return keys[i].String() < keys[j].String() })
		for _, k := range keys {
			collect(out, v.MapIndex(k), join(path, k.String()))
		}
	case reflect.Struct:
		for i := range v.NumField() {
			name, omit := fieldName(v.Type().Field(i))
			if name == "" || omit && empty(v.Field(i)) {
				continue
			}
			collect(out, v.Field(i), join(path, name))
		}
	}
}

func join(path, name string) string {
	if path == "" {
		return name
	}
	return path + "." + name
}

// nameOf gives the words that tell one entry of a list from the others.
func nameOf(v reflect.Value) string {
	if v.Kind() != reflect.Struct {
		return ""
	}
	words := map[string]string{}
	for i := range v.NumField() {
		if f := v.Field(i); f.Kind() == reflect.String {
			name, _ := fieldName(v.Type().Field(i))
			words[name] = f.String()
		}
	}
	var parts []string
	for _, n := range naming {
		if words[n] != "" {
			parts = append(parts, words[n])
		}
	}
	return strings.Join(parts, ", ")
}
