package result

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"reflect"
	"sort"
	"strconv"
	"strings"

	"thinward/analysis"
)

// Encode returns r as indented JSON ending in a line end.
func Encode(r *analysis.Result) ([]byte, error) {
	if r == nil {
		return nil, fmt.Errorf("result: nothing to encode")
	}
	var b bytes.Buffer
	if err := encode(&b, reflect.ValueOf(r).Elem(), 0); err != nil {
		return nil, err
	}
	b.WriteByte('\n')
	return b.Bytes(), nil
}

func encode(b *bytes.Buffer, v reflect.Value, depth int) error {
	switch v.Kind() {
	case reflect.Pointer:
		if v.IsNil() {
			b.WriteString("null")
			return nil
		}
		return encode(b, v.Elem(), depth)
	case reflect.Float64:
		writeFloat(b, v.Float())
	case reflect.Int, reflect.Int32, reflect.Int64:
		b.WriteString(strconv.FormatInt(v.Int(), 10))
	case reflect.Uint64:
		b.WriteString(strconv.FormatUint(v.Uint(), 10))
	case reflect.Bool:
		b.WriteString(strconv.FormatBool(v.Bool()))
	case reflect.String:
		return writeString(b, v.String())
	case reflect.Slice, reflect.Array:
		return encodeList(b, v, depth)
	case reflect.Map:
		return encodeMap(b, v, depth)
	case reflect.Struct:
		return encodeStruct(b, v, depth)
	default:
		return fmt.Errorf("result: a field of kind %s cannot be written", v.Kind())
	}
	return nil
}

func writeFloat(b *bytes.Buffer, f float64) {
	switch {
	case math.IsNaN(f):
		b.WriteString("null")
	case math.IsInf(f, 1):
		b.WriteString(`"inf"`)
	case math.IsInf(f, -1):
		b.WriteString(`"-inf"`)
	default:
		b.Write(strconv.AppendFloat(nil, f, 'g', -1, 64))
	}
}

func writeString(b *bytes.Buffer, s string) error {
	t, err := json.Marshal(s)
	b.Write(t)
	return err
}

func scalar(k reflect.Kind) bool {
	return k == reflect.Float64 || k == reflect.Int || k == reflect.String || k == reflect.Bool
}

func encodeList(b *bytes.Buffer, v reflect.Value, depth int) error {
	flat := scalar(v.Type().Elem().Kind())
	b.WriteByte('[')
	for i := range v.Len() {
		if i > 0 {
			b.WriteByte(',')
		}
		if !flat {
			newline(b, depth+1)
		} else if i > 0 {
			b.WriteByte(' ')
		}
		if err := encode(b, v.Index(i), depth+1); err != nil {
			return err
		}
	}
	if !flat && v.Len() > 0 {
		newline(b, depth)
	}
	b.WriteByte(']')
	return nil
}

func encodeMap(b *bytes.Buffer, v reflect.Value, depth int) error {
	keys := v.MapKeys()
	sort.Slice(keys, func(i, j int) bool { return keys[i].String() < keys[j].String() })
	b.WriteByte('{')
	for i, k := range keys {
		if i > 0 {
			b.WriteByte(',')
		}
		newline(b, depth+1)
		if err := writeString(b, k.String()); err != nil {
			return err
		}
		b.WriteString(": ")
		if err := encode(b, v.MapIndex(k), depth+1); err != nil {
			return err
		}
	}
	if len(keys) > 0 {
		newline(b, depth)
	}
	b.WriteByte('}')
	return nil
}

func encodeStruct(b *bytes.Buffer, v reflect.Value, depth int) error {
	b.WriteByte('{')
	first := true
	for i := range v.NumField() {
		name, omit := fieldName(v.Type().Field(i))
		f := v.Field(i)
		if name == "" || omit && empty(f) {
			continue
		}
		if !first {
			b.WriteByte(',')
		}
		first = false
		newline(b, depth+1)
		b.WriteString(strconv.Quote(name))
		b.WriteString(": ")
		if err := encode(b, f, depth+1); err != nil {
			return fmt.Errorf("%s: %w", name, err)
		}
	}
	if !first {
		newline(b, depth)
	}
	b.WriteByte('}')
	return nil
}

func empty(v reflect.Value) bool {
	switch v.Kind() {
	case reflect.Slice, reflect.Map:
		return v.Len() == 0
	}
	return v.IsZero()
}

// fieldName returns the JSON name of a field, "" for one that is not written,
// and whether it is left out when empty.
func fieldName(f reflect.StructField) (string, bool) {
	tag := f.Tag.Get("json")
	name, rest, _ := strings.Cut(tag, ",")
	if name == "-" || !f.IsExported() {
		return "", false
	}
	if name == "" {
		name = f.Name
	}
	return name, rest == "omitempty"
}

func newline(b *bytes.Buffer, depth int) {
	b.WriteByte('\n')
	for range depth {
		b.WriteString("  ")
	}
}

// EncodeAny writes any plain data under the rules of Encode.
func EncodeAny(w io.Writer, v any) error {
	var b bytes.Buffer
	if err := encode(&b, reflect.ValueOf(v), 0); err != nil {
		return err
	}
	b.WriteByte('\n')
	_, err := w.Write(b.Bytes())
	return err
}
