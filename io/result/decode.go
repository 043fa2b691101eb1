package result

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"

	"thinward/analysis"
)

// Decode reads what Encode wrote. A higher major number of the schema is
// refused by name; fields that this version does not know are passed over.
func Decode(data []byte) (*analysis.Result, error) {
	d := json.NewDecoder(bytes.NewReader(data))
	d.UseNumber()
	var tree any
	if err := d.Decode(&tree); err != nil {
		return nil, fmt.Errorf("result: this is not JSON: %w", err)
	}
	object, ok := tree.(map[string]any)
	if !ok {
		return nil, fmt.Errorf("result: the file does not hold an object")
	}
	if d.More() {
		return nil, fmt.Errorf("result: the file holds more than one value")
	}
	if err := checkSchema(object); err != nil {
		return nil, err
	}
	r := new(analysis.Result)
	if err := assign(reflect.ValueOf(r).Elem(), tree, ""); err != nil {
		return nil, err
	}
	return r, nil
}

// checkSchema refuses what this version cannot read, by name.
func checkSchema(object map[string]any) error {
	schema, ok := object["schema"].(string)
	if !ok {
		return fmt.Errorf("result: the file names no schema: it is no result.json")
	}
	if schema == analysis.Schema {
		return nil
	}
	family, ours, _ := strings.Cut(analysis.Schema, "/")
	if name, major, _ := strings.Cut(schema, "/"); name == family {
		have, err1 := strconv.Atoi(major)
		know, err2 := strconv.Atoi(ours)
		if err1 == nil && err2 == nil && have > know {
			return fmt.Errorf("result: the file says schema %q, which a newer version wrote; this version reads %q: use a newer version", schema, analysis.Schema)
		}
	}
	return fmt.Errorf("result: the file says schema %q; this version reads %q", schema, analysis.Schema)
}

func assign(dst reflect.Value, src any, path string) error {
	wrong := func() error {
		return fmt.Errorf("result: %s holds %T, which does not fit", strings.TrimPrefix(path, "."), src)
	}
	switch dst.Kind() {
	case reflect.Pointer:
		if src == nil {
			return nil
		}
		dst.Set(reflect.New(dst.Type().Elem()))
		return assign(dst.Elem(), src, path)
	case reflect.Float64:
		f, ok := number(src)
		if !ok {
			return wrong()
		}
		dst.SetFloat(f)
	case reflect.Int:
		n, ok := src.(json.Number)
		if !ok {
			return wrong()
		}
		i, err := n.Int64()
		if err != nil {
			return wrong()
		}
		dst.SetInt(i)
	case reflect.Uint64:
		n, ok := src.(json.Number)
		if !ok {
			return wrong()
		}
		u, err := strconv.ParseUint(n.String(), 10, 64)
		if err != nil {
			return wrong()
		}
		dst.SetUint(u)
	case reflect.Bool:
		v, ok := src.(bool)
		if !ok {
			return wrong()
		}
		dst.SetBool(v)
	case reflect.String:
		v, ok := src.(string)
		if !ok {
			return wrong()
		}
		dst.SetString(v)
	case reflect.Slice, reflect.Array:
		return assignList(dst, src, path, wrong)
	case reflect.Map:
		return assignMap(dst, src, path, wrong)
	case reflect.Struct:
		object, ok := src.(map[string]any)
		if !ok {
			return wrong()
		}
		for i := range dst.NumField() {
			name, _ := fieldName(dst.Type().Field(i))
			if value, ok := object[name]; ok && name != "" {
				if err := assign(dst.Field(i), value, path+"."+name); err != nil {
					return err
				}
			}
		}
	default:
		return wrong()
	}
	return nil
}

func assignList(dst reflect.Value, src any, path string, wrong func() error) error {
	list, ok := src.([]any)
	if !ok {
		return wrong()
	}
	if dst.Kind() == reflect.Slice {
		dst.Set(reflect.MakeSlice(dst.Type(), len(list), len(list)))
	} else if len(list) != dst.Len() {
		return wrong()
	}
	for i := range list {
		if err := assign(dst.Index(i), list[i], path+"["+strconv.Itoa(i)+"]"); err != nil {
			return err
		}
	}
	return nil
}

func assignMap(dst reflect.Value, src any, path string, wrong func() error) error {
	object, ok := src.(map[string]any)
	if !ok {
		return wrong()
	}
	dst.Set(reflect.MakeMap(dst.Type()))
	for name, value := range object {
		v := reflect.New(dst.Type().Elem()).Elem()
		if err := assign(v, value, path+"."+name); err != nil {
			return err
		}
		dst.SetMapIndex(reflect.ValueOf(name), v)
	}
	return nil
}

func number(src any) (float64, bool) {
	switch v := src.(type) {
	case nil:
		return math.NaN(), true
	case string:
		switch v {
		case "inf":
			return math.Inf(1), true
		case "-inf":
			return math.Inf(-1), true
		}
	case json.Number:
		f, err := v.Float64()
		return f, err == nil
	}
	return 0, false
}
