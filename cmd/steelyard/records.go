package main

import (
	"bytes"
	"encoding/csv"
	"maps"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"unicode"
)

// records writes a list of a JSON document as CSV: one row for each entry of the list
// at path, one column for each number and text of an entry, under the names of the
// JSON, with "_" between a part and what is in it. Numbers have full precision.
//
//   - On the way down the path the entry's name ("outcome") and problem are kept, and a
//     parent without the list has one row, so that nothing is lost without a word.
//   - A list of texts is joined with "; "; a list of pairs, such as prior and posterior,
//     makes a column for each pair; other lists and maps have tables of their own.
//   - A column that is blank in every row is left out.
//   - Text that a spreadsheet would take for a formula is preceded by an apostrophe.
func records(document any, path ...string) []byte {
	var t recordTable
	t.descend(reflect.ValueOf(document), record{}, path)
	var out bytes.Buffer
	w := csv.NewWriter(&out)
	_ = w.Write(t.names) // a buffer takes everything
	for _, r := range t.rows {
		row := make([]string, len(t.names))
		for i, name := range t.names {
			row[i] = r[name]
		}
		_ = w.Write(row)
	}
	w.Flush()
	return out.Bytes()
}

// record is one row: texts by column.
type record map[string]string

// recordTable collects rows and the order of their columns; last is where a new
// column goes.
type recordTable struct {
	names []string
	rows  []record
	last  int
}

// put sets a value of a row, and adds its column behind that of the value before it.
func (t *recordTable) put(r record, name, text string) {
	if text == "" {
		return
	}
	r[name] = text
	at := slices.Index(t.names, name)
	if at < 0 {
		at = t.last
		t.names = slices.Insert(t.names, at, name)
	}
	t.last = at + 1
}

// descend follows the path to the list and makes a row of each of its entries; kept
// holds what the rows take over from above.
func (t *recordTable) descend(v reflect.Value, kept record, path []string) {
	v = solid(v)
	if v.IsValid() && v.Kind() == reflect.Slice && !scalars(v) {
		for i := range v.Len() {
			t.descend(v.Index(i), kept, path)
		}
		return
	}
	if len(path) == 0 || !v.IsValid() {
		row := record{}
		for _, name := range t.names {
			if text, ok := kept[name]; ok {
				row[name] = text
			}
		}
		if t.last = len(row); v.IsValid() {
			t.flatten(row, "", v)
		}
		t.rows = append(t.rows, row)
		return
	}
	kept = maps.Clone(kept)
	for _, name := range []string{"outcome", "problem"} {
		if f, ok := named(v, name); ok {
			t.put(kept, name, scalar(f))
		}
	}
	next, ok := named(v, path[0])
	if !ok {
		next = reflect.Value{}
	}
	if s := solid(next); s.IsValid() && s.Kind() == reflect.Slice && s.Len() == 0 {
		if len(kept) > 0 {
			t.rows = append(t.rows, kept)
			return
		}
		t.heads(s.Type().Elem())
		return
	}
	t.descend(next, kept, path[1:])
}

// heads names the plain columns of an empty list.
func (t *recordTable) heads(of reflect.Type) {
	for _, f := range reflect.VisibleFields(of) {
		switch f.Type.Kind() {
		case reflect.String, reflect.Bool, reflect.Int, reflect.Float64:
			if name := jsonName(f); name != "" {
				t.names = append(t.names, name)
			}
		}
	}
}

// flatten puts the numbers and texts of a struct into a row.
func (t *recordTable) flatten(row record, prefix string, v reflect.Value) {
	for i := range v.NumField() {
		f, field := v.Type().Field(i), solid(v.Field(i))
		name := jsonName(f)
		if known := slices.Index(t.names, prefix+name); known >= 0 {
			t.last = known + 1 // also where this row has no value
		}
		if !field.IsValid() || !f.IsExported() || (name == "" && !f.Anonymous) {
			continue
		}
		omitted := strings.Contains(f.Tag.Get("json"), ",omitempty") && field.IsZero()
		switch {
		case omitted:
		case field.Kind() == reflect.Struct && f.Anonymous && name == "":
			t.flatten(row, prefix, field)
		case field.Kind() == reflect.Struct:
			t.flatten(row, prefix+name+"_", field)
		case field.Kind() == reflect.Slice && !scalars(field):
			t.pairs(row, prefix+name, field)
		case field.Kind() != reflect.Map:
			t.put(row, prefix+name, scalar(field))
		}
	}
}

// pairs puts a list of structs of two scalars into a row: the first is the key.
func (t *recordTable) pairs(row record, name string, list reflect.Value) {
	for i := range list.Len() {
		pair := solid(list.Index(i))
		if !pair.IsValid() || pair.Kind() != reflect.Struct || pair.NumField() != 2 {
			return
		}
		key, value := scalar(solid(pair.Field(0))), scalar(solid(pair.Field(1)))
		t.put(row, name+"_"+key, value)
	}
}

// named finds the field of a struct that has a name in the JSON, in embedded structs too.
func named(v reflect.Value, name string) (reflect.Value, bool) {
	if v.Kind() != reflect.Struct {
		return v, false
	}
	for i := range v.NumField() {
		f := v.Type().Field(i)
		if jsonName(f) == name {
			return v.Field(i), true
		}
		if embedded := solid(v.Field(i)); f.Anonymous && embedded.IsValid() {
			if found, ok := named(embedded, name); ok {
				return found, true
			}
		}
	}
	return v, false
}

// solid follows pointers and interfaces; the zero Value stands for nil.
func solid(v reflect.Value) reflect.Value {
	for v.IsValid() && (v.Kind() == reflect.Pointer || v.Kind() == reflect.Interface) {
		v = v.Elem()
	}
	return v
}

func jsonName(f reflect.StructField) string {
	name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
	return name
}

// scalars reports whether a list holds texts or numbers.
func scalars(list reflect.Value) bool {
	switch list.Type().Elem().Kind() {
	case reflect.String, reflect.Bool, reflect.Int, reflect.Float64:
		return true
	}
	return false
}

// scalar writes a number, a text or a list of them for a cell.
func scalar(v reflect.Value) string {
	switch v.Kind() {
	case reflect.String:
		return harmless(v.String())
	case reflect.Bool:
		return strconv.FormatBool(v.Bool())
	case reflect.Int:
		return strconv.FormatInt(v.Int(), 10)
	case reflect.Float64:
		return strconv.FormatFloat(v.Float(), 'g', -1, 64)
	case reflect.Slice:
		texts := make([]string, v.Len())
		for i := range texts {
			texts[i] = scalar(v.Index(i))
		}
		return strings.Join(texts, "; ")
	}
	return ""
}

// harmless keeps a spreadsheet from reading text as a formula: blanks and control
// characters at its start go, and one of = + - @ or their wide forms there gets an
// apostrophe in front.
func harmless(text string) string {
	text = strings.TrimLeftFunc(text, func(r rune) bool { return unicode.IsSpace(r) || unicode.IsControl(r) })
	if strings.IndexAny(text, "=+-@＝＋－＠") == 0 {
		return "'" + text
	}
	return text
}
