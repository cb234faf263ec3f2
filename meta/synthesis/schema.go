package synthesis

import (
	"reflect"
	"strings"

	"steelyard/meta/review"
)

// Schema returns the JSON Schema (draft 2020-12) of a Document, or of a
// WeighingDocument, made from the Go types and the table of settings: what may be
// absent is not required, and nothing else is allowed.
func Schema(document any) map[string]any {
	schema := schemaOf(reflect.TypeOf(document))
	schema["$schema"] = "https://json-schema.org/draft/2020-12/schema"
	return schema
}

var planType = reflect.TypeFor[map[string]PlanDocument]()

func schemaOf(t reflect.Type) map[string]any {
	switch {
	case t == planType:
		return planSchema()
	case t.Kind() == reflect.Pointer:
		return schemaOf(t.Elem())
	case t.Kind() == reflect.Struct:
		properties, required := map[string]any{}, []string{}
		addFields(t, properties, &required)
		return map[string]any{"type": "object", "properties": properties, "required": required, "additionalProperties": false}
	case t.Kind() == reflect.Slice:
		return map[string]any{"type": "array", "items": schemaOf(t.Elem())}
	case t.Kind() == reflect.Map:
		return map[string]any{"type": "object", "additionalProperties": schemaOf(t.Elem())}
	case t.Kind() == reflect.Bool:
		return map[string]any{"type": "boolean"}
	case t.Kind() == reflect.Int:
		return map[string]any{"type": "integer"}
	case t.Kind() == reflect.Float64:
		return map[string]any{"type": "number"}
	}
	return map[string]any{"type": "string"}
}

// addFields adds a struct's fields; those of an embedded struct are its own, and
// those behind an embedded pointer may all be absent.
func addFields(t reflect.Type, properties map[string]any, required *[]string) {
	for field := range t.Fields() {
		if field.Anonymous {
			var optional []string
			if field.Type.Kind() == reflect.Pointer {
				addFields(field.Type.Elem(), properties, &optional)
			} else {
				addFields(field.Type, properties, required)
			}
			continue
		}
		name, options, _ := strings.Cut(field.Tag.Get("json"), ",")
		properties[name] = schemaOf(field.Type)
		if options != "omitempty" {
			*required = append(*required, name)
		}
	}
}

// planSchema lists every setting; one that is a choice takes its values only.
func planSchema() map[string]any {
	properties := map[string]any{}
	for _, s := range review.Settings() {
		entry := schemaOf(reflect.TypeFor[PlanDocument]())
		entry["description"] = s.Meaning
		properties[s.Name] = entry
	}
	return map[string]any{"type": "object", "properties": properties, "additionalProperties": false}
}
