package session

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
	"slices"
	"strconv"
	"strings"
)

const (
	maxManifest = 64 << 20 // bytes; one take needs some 400
	cure        = "move it away and start again: the takes are still there and are taken up again"
)

// decode reads a manifest and refuses what could not have been written by any
// version of the program. The name is only for messages.
func decode(name string, data []byte) (Manifest, error) {
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(data, &head); err != nil {
		return Manifest{}, broken(name, data, err)
	}
	if err := checkSchema(head.Schema); err != nil {
		return Manifest{}, fmt.Errorf("%s: %w", name, err)
	}
	var m Manifest
	if err := json.Unmarshal(data, &m); err != nil {
		return Manifest{}, broken(name, data, err)
	}
	if err := m.check(); err != nil {
		return Manifest{}, hintedf(cure, "%s: %w", name, err)
	}
	m.tidy()
	m.keepExtra(data)
	return m, nil
}

func checkSchema(schema string) error {
	base, number, _ := cutLast(Schema, "/")
	family, theirs, ok := cutLast(schema, "/")
	n, err := strconv.Atoi(theirs)
	ours, _ := strconv.Atoi(number)
	switch {
	case !ok || family != base || err != nil || n < 1:
		return fmt.Errorf("not the manifest of a session: its schema is %q", schema)
	case n > ours:
		return hintedf("use a newer version of the program",
			"made by a later version: its schema is %s, and this version reads up to %s", schema, Schema)
	}
	return nil
}

func cutLast(s, sep string) (before, after string, found bool) {
	i := strings.LastIndex(s, sep)
	if i < 0 {
		return s, "", false
	}
	return s[:i], s[i+len(sep):], true
}

// broken says where JSON stops being a manifest.
func broken(name string, data []byte, err error) error {
	at := int64(-1)
	var syntax *json.SyntaxError
	var kind *json.UnmarshalTypeError
	text := err.Error()
	switch {
	case errors.As(err, &syntax):
		at = syntax.Offset
	case errors.As(err, &kind):
		at = kind.Offset
		text = fmt.Sprintf("%s cannot be a %s", kind.Field, kind.Value)
	}
	if at >= 0 {
		line, column := position(data, at)
		name = fmt.Sprintf("%s:%d:%d", name, line, column)
	}
	return hintedf(cure, "%s: broken: %s", name, printable(text))
}

// position of the byte before offset, lines and columns (in bytes) from 1.
func position(data []byte, offset int64) (line, column int) {
	before := data[:min(max(offset-1, 0), int64(len(data)))]
	return 1 + bytes.Count(before, []byte("\n")), len(before) - bytes.LastIndexByte(before, '\n')
}

// encode writes a manifest, and refuses to write one that decode would refuse.
func encode(m Manifest) ([]byte, error) {
	takes := make([]json.RawMessage, len(m.Takes))
	for i, t := range m.Takes {
		if t.Flags == nil {
			t.Flags = t.Flags[:0:0]
		}
		raw, err := withExtra(t, t.extra)
		if err != nil {
			return nil, err
		}
		takes[i] = raw
	}
	raw, err := withExtra(struct {
		Manifest
		Takes []json.RawMessage `json:"takes"` // hides Manifest.Takes
	}{m, takes}, m.extra)
	if err != nil {
		return nil, err
	}
	var out bytes.Buffer
	if err := json.Indent(&out, raw, "", "  "); err != nil {
		return nil, err
	}
	out.WriteByte('\n')
	_, err = decode("session.json", out.Bytes())
	return out.Bytes(), err
}

// withExtra is the JSON of a struct followed by keys that it does not have.
func withExtra(known any, extra map[string]json.RawMessage) (json.RawMessage, error) {
	raw, err := json.Marshal(known)
	if err != nil || len(extra) == 0 {
		return raw, err
	}
	more, err := json.Marshal(extra)
	if err != nil {
		return nil, err
	}
	return slices.Concat(raw[:len(raw)-1], []byte(","), more[1:]), nil
}

func (m *Manifest) keepExtra(data []byte) {
	var doc struct {
		Takes []map[string]json.RawMessage `json:"takes"`
	}
	// Both have been decoded once, as structs: they cannot fail as maps.
	_ = json.Unmarshal(data, &m.extra)
	_ = json.Unmarshal(data, &doc)
	dropKnown(m.extra, reflect.TypeFor[Manifest]())
	for i := range min(len(m.Takes), len(doc.Takes)) {
		m.Takes[i].extra = doc.Takes[i]
		dropKnown(doc.Takes[i], reflect.TypeFor[Take]())
	}
}

// dropKnown leaves the keys that encoding/json does not put into a field of the
// struct; it matches names without regard to case.
func dropKnown(keys map[string]json.RawMessage, of reflect.Type) {
	for key := range keys {
		for i := range of.NumField() {
			name, _, _ := strings.Cut(of.Field(i).Tag.Get("json"), ",")
			if name != "" && strings.EqualFold(name, key) {
				delete(keys, key)
			}
		}
	}
}
