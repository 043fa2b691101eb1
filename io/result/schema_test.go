package result

import (
	"encoding/json"
	"fmt"
	"os"
	"strings"
	"testing"

	"thinward/analysis"
)

func TestSchemaFileIsFresh(t *testing.T) {
	want, err := JSONSchema()
	if err != nil {
		t.Fatal(err)
	}
	if *regen {
		if err := os.WriteFile("schema.json", want, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	got, err := os.ReadFile("schema.json")
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != string(want) {
		t.Error("schema.json is stale: run go generate ./io/result")
	}
}

// validate is the part of JSON Schema 2020-12 that the file uses.
func validate(root, schema map[string]any, value any, path string) error {
	if ref, ok := schema["$ref"].(string); ok {
		name := strings.TrimPrefix(ref, "#/$defs/")
		def, ok := root["$defs"].(map[string]any)[name].(map[string]any)
		if !ok {
			return fmt.Errorf("%s: no definition %s", path, ref)
		}
		return validate(root, def, value, path)
	}
	if list, ok := schema["anyOf"].([]any); ok {
		for _, s := range list {
			if validate(root, s.(map[string]any), value, path) == nil {
				return nil
			}
		}
		return fmt.Errorf("%s: %v fits no choice", path, value)
	}
	if list, ok := schema["enum"].([]any); ok {
		for _, v := range list {
			if v == value {
				return nil
			}
		}
		return fmt.Errorf("%s: %v is not listed", path, value)
	}
	if want, ok := schema["const"]; ok {
		if want != value {
			return fmt.Errorf("%s: %v is not %v", path, value, want)
		}
		return nil
	}
	switch schema["type"] {
	case "null":
		if value != nil {
			return fmt.Errorf("%s: not null", path)
		}
	case "number", "integer":
		n, ok := value.(json.Number)
		if !ok || schema["type"] == "integer" && strings.ContainsAny(n.String(), ".eE") {
			return fmt.Errorf("%s: %v is no %v", path, value, schema["type"])
		}
	case "boolean":
		if _, ok := value.(bool); !ok {
			return fmt.Errorf("%s: %v is no boolean", path, value)
		}
	case "string":
		if _, ok := value.(string); !ok {
			return fmt.Errorf("%s: %v is no string", path, value)
		}
	case "array":
		return validateList(root, schema, value, path)
	case "object":
		return validateObject(root, schema, value, path)
	default:
		return fmt.Errorf("%s: the schema uses the type %v", path, schema["type"])
	}
	return nil
}

func validateList(root, schema map[string]any, value any, path string) error {
	list, ok := value.([]any)
	if !ok {
		return fmt.Errorf("%s: %T is no array", path, value)
	}
	for _, bound := range []struct {
		name string
		bad  func(n int) bool
	}{{"minItems", func(n int) bool { return len(list) < n }}, {"maxItems", func(n int) bool { return len(list) > n }}} {
		if n, ok := schema[bound.name].(json.Number); ok {
			k, err := n.Int64()
			if err != nil || bound.bad(int(k)) {
				return fmt.Errorf("%s: %d items against %s %v", path, len(list), bound.name, n)
			}
		}
	}
	for i, v := range list {
		if err := validate(root, schema["items"].(map[string]any), v, fmt.Sprintf("%s[%d]", path, i)); err != nil {
			return err
		}
	}
	return nil
}

func validateObject(root, schema map[string]any, value any, path string) error {
	object, ok := value.(map[string]any)
	if !ok {
		return fmt.Errorf("%s: %T is no object", path, value)
	}
	required, _ := schema["required"].([]any)
	for _, name := range required {
		if _, ok := object[name.(string)]; !ok {
			return fmt.Errorf("%s: %v is missing", path, name)
		}
	}
	properties, _ := schema["properties"].(map[string]any)
	extra, _ := schema["additionalProperties"].(map[string]any)
	for name, v := range object {
		s, ok := properties[name].(map[string]any)
		if !ok {
			s = extra
		}
		if s == nil {
			continue
		}
		if err := validate(root, s, v, path+"."+name); err != nil {
			return err
		}
	}
	return nil
}

func tree(t *testing.T, data []byte) map[string]any {
	t.Helper()
	d := json.NewDecoder(strings.NewReader(string(data)))
	d.UseNumber()
	var v map[string]any
	if err := d.Decode(&v); err != nil {
		t.Fatal(err)
	}
	return v
}

func TestResultsConform(t *testing.T) {
	file, err := os.ReadFile("schema.json")
	if err != nil {
		t.Fatal(err)
	}
	schema := tree(t, file)
	for name, r := range map[string]*analysis.Result{"whole": whole(), "empty": {Schema: analysis.Schema}} {
		data, err := Encode(r)
		if err != nil {
			t.Fatal(err)
		}
		if err := validate(schema, schema, any(tree(t, data)), "result"); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestSchemaRefuses(t *testing.T) {
	text, err := JSONSchema()
	if err != nil {
		t.Fatal(err)
	}
	schema := tree(t, text)
	data, err := Encode(whole())
	if err != nil {
		t.Fatal(err)
	}
	for name, spoil := range map[string]func(map[string]any){
		"no seed":            func(r map[string]any) { delete(r, "seed") },
		"other schema":       func(r map[string]any) { r["schema"] = "thinward.result/2" },
		"word for a number":  func(r map[string]any) { r["crystals"].(map[string]any)["q"] = "much" },
		"fraction of a pair": func(r map[string]any) { r["contrasts"].([]any)[0].(map[string]any)["pairs"] = json.Number("1.5") },
		"one thickness": func(r map[string]any) {
			r["contrasts"].([]any)[1].(map[string]any)["thickness_nm"] = []any{json.Number("1")}
		},
		"number for a list": func(r map[string]any) { r["ledger"] = json.Number("3") },
	} {
		r := tree(t, data)
		spoil(r)
		if validate(schema, schema, any(r), "result") == nil {
			t.Errorf("%s: accepted", name)
		}
	}
}
