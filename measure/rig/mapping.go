package rig

import (
	"fmt"
	"slices"
	"strings"

	"gopkg.in/yaml.v3"
)

// file is a rig being read: its name, what is wrong with it, and which keys it
// was asked for.
type file struct {
	name  string
	errs  Errors
	asked []string              // paths of all keys that had a chance to be there
	found map[string]*yaml.Node // path → value, of those that were
	// include reads a file that this one names.
	include func(name string) (path string, raw []byte, err error)
}

func (f *file) fail(line int, key, reason, hint string) {
	f.errs = append(f.errs, &Error{File: f.name, Line: line, Key: key, Reason: reason, Hint: hint})
}

// has reports whether the file itself gives a key.
func (f *file) has(path string) bool { return f.found[path] != nil }

// text is what the file says at a path, or the fallback.
func (f *file) text(path, fallback string) string {
	if n := f.found[path]; n != nil {
		return show(n.Value)
	}
	return fallback
}

// sound reports whether nothing is wrong with these keys so far, so that a check
// that compares them makes sense.
func (f *file) sound(paths ...string) bool {
	return !slices.ContainsFunc(f.errs, func(e *Error) bool { return slices.Contains(paths, e.Key) })
}

// mapping hands out the values of one YAML mapping key by key and complains at
// last about what nobody asked for. A mapping that the file leaves out hands
// out defaults.
type mapping struct {
	*file
	path   string
	state  state
	line   int // of the key that it belongs to, or of what should have that key
	keys   []*yaml.Node
	values map[string]*yaml.Node
	known  []string // what was asked for
}

type state int

const (
	given state = iota
	leftOut
	broken // not a mapping; noted already
)

// mapping opens the node at path, which belongs to a key in this line; nil
// stands for one that is left out.
func (f *file) mapping(n *yaml.Node, path string, line int) *mapping {
	m := &mapping{file: f, path: path, line: line, values: map[string]*yaml.Node{}}
	switch {
	case n == nil:
		m.state = leftOut
		return m
	case n.Kind != yaml.MappingNode:
		m.state = broken
		f.fail(n.Line, path, kindOf(n)+" where a block of keys is due", "write key: value lines, indented")
		return m
	}
	for i := 0; i+1 < len(n.Content); i += 2 {
		m.keys = append(m.keys, n.Content[i])
		m.values[n.Content[i].Value] = n.Content[i+1]
	}
	return m
}

// kindOf says what a node is, in words.
func kindOf(n *yaml.Node) string {
	switch {
	case n.Kind == yaml.MappingNode:
		return "a block of keys"
	case n.Kind == yaml.SequenceNode:
		return "a list"
	}
	return show(n.Value)
}

// take is the value of a key, nil when it is left out. A key without value is
// an error: it may mean the default or nothing at all.
func (m *mapping) take(key string) *yaml.Node {
	path := join(m.path, key)
	m.known = append(m.known, key)
	m.asked = append(m.asked, path)
	n := m.values[key]
	if n != nil && n.Kind == yaml.ScalarNode && n.Tag == "!!null" {
		m.fail(n.Line, path, "has no value", "give it one, or remove the key for its default")
		return nil
	}
	if n != nil {
		m.found[path] = n
	}
	return n
}

// require complains when a key is left out, at the line of its parent.
func (m *mapping) require(key, example string) {
	if m.values[key] != nil || m.state == broken {
		return
	}
	cure := key + ": " + example
	if m.state == leftOut {
		cure = m.path + ": {" + cure + "}"
	}
	m.fail(m.line, join(m.path, key), "is required", "write "+cure)
}

// section opens a mapping inside this one.
func (m *mapping) section(key string) *mapping {
	return m.mapping(m.take(key), join(m.path, key), m.lineOf(key))
}

// lineOf is the line of a key, or of the mapping when it is left out.
func (m *mapping) lineOf(key string) int {
	for _, k := range m.keys {
		if k.Value == key {
			return k.Line
		}
	}
	return m.line
}

// close complains about all keys that nobody asked for.
func (m *mapping) close() {
	for _, key := range m.keys {
		if slices.Contains(m.known, key.Value) {
			continue
		}
		hint := "keys here: " + strings.Join(m.known, ", ")
		if len(m.known) == 0 {
			hint = "remove it"
		}
		if near := nearest(key.Value, m.known); near != "" {
			hint = fmt.Sprintf("did you mean %s?", near)
		}
		m.fail(key.Line, join(m.path, key.Value), "unknown key", hint)
	}
}

// refuse complains about a key that exists elsewhere but means nothing here.
func (m *mapping) refuse(key, reason, hint string) {
	if n := m.take(key); n != nil {
		m.fail(n.Line, join(m.path, key), reason, hint)
	}
}

// entry is one entry of a list.
type entry struct {
	node *yaml.Node
	path string
}

// list reads a list of least to most entries.
func (m *mapping) list(key string, least, most int, due, hint string) []entry {
	n := m.take(key)
	path := join(m.path, key)
	if n == nil {
		return nil
	}
	switch count := len(n.Content); {
	case n.Kind != yaml.SequenceNode:
		m.fail(n.Line, path, kindOf(n)+" where "+due+" is due", hint)
		return nil
	case count == 0 && least > 0:
		m.fail(n.Line, path, "the list is empty", hint)
	case count < least:
		m.fail(m.lineOf(key), path, fmt.Sprintf("%d in the list where at least %d are due", count, least), hint)
	case count > most:
		m.fail(m.lineOf(key), path, fmt.Sprintf("%d in the list where at most %d are possible", count, most), "")
		return nil
	}
	return m.entries(n, path)
}

func (m *mapping) entries(n *yaml.Node, path string) []entry {
	out := make([]entry, len(n.Content))
	for i, e := range n.Content {
		out[i] = entry{e, index(path, i)}
		m.found[out[i].path] = e
	}
	return out
}
