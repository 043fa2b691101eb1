package result

import (
	"encoding/json"
	"reflect"

	"thinward/analysis"
)

// JSONSchema returns the JSON Schema (2020-12) of result.json, made from the
// fields of analysis.Result.
func JSONSchema() ([]byte, error) {
	root := schemaOf(reflect.TypeOf(analysis.Result{}))
	root["$schema"] = "https://json-schema.org/draft/2020-12/schema"
	root["properties"].(map[string]any)["schema"] = map[string]any{"const": analysis.Schema}
	root["title"] = analysis.Schema
	root["$defs"] = map[string]any{
		"number": map[string]any{
			"description": "null is not-a-number, an open interval end is inf or -inf",
			"anyOf": []any{
				map[string]any{"type": "number"},
				map[string]any{"type": "null"},
				map[string]any{"enum": []any{"inf", "-inf"}},
			},
		},
	}
	out, err := json.MarshalIndent(root, "", "  ")
	return append(out, '\n'), err
}

func schemaOf(t reflect.Type) map[string]any {
	switch t.Kind() {
	case reflect.Pointer:
		return map[string]any{"anyOf": []any{map[string]any{"type": "null"}, schemaOf(t.Elem())}}
	case reflect.Float64:
		return map[string]any{"$ref": "#/$defs/number"}
	case reflect.Int, reflect.Uint64:
		return map[string]any{"type": "integer"}
	case reflect.Bool:
		return map[string]any{"type": "boolean"}
	case reflect.String:
		return map[string]any{"type": "string"}
	case reflect.Slice:
		return map[string]any{"type": "array", "items": schemaOf(t.Elem())}
	case reflect.Array:
		return map[string]any{"type": "array", "items": schemaOf(t.Elem()), "minItems": t.Len(), "maxItems": t.Len()}
	case reflect.Map:
		return map[string]any{"type": "object", "additionalProperties": schemaOf(t.Elem())}
	}
	properties := map[string]any{}
	required := []string{}
	for i := range t.NumField() {
		name, omit := fieldName(t.Field(i))
		if name == "" {
			continue
		}
		properties[name] = schemaOf(t.Field(i).Type)
		if !omit {
			required = append(required, name)
		}
	}
	return map[string]any{"type": "object", "properties": properties, "required": required}
}
