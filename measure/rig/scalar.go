package rig

import (
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"unicode"

	"gopkg.in/yaml.v3"
)

// The readers below take one key each. A default and the limits stand in the
// notation of the file, so that code, starter rig and messages agree.

// scalar is the text of a key. ok is false when there is none to be read:
// left out, or an error that has been noted.
func (m *mapping) scalar(key, due string) (text string, line int, ok bool) {
	n := m.take(key)
	if n == nil {
		return "", m.line, false
	}
	text, ok = m.textOf(n, join(m.path, key), due)
	return text, n.Line, ok
}

func (f *file) textOf(n *yaml.Node, path, due string) (string, bool) {
	if n.Kind != yaml.ScalarNode || n.Tag == "!!null" {
		f.fail(n.Line, path, kindOf(n)+" where "+due+" is due", "")
		return "", false
	}
	return strings.TrimSpace(n.Value), true
}

// span is what a quantity may be: from lo to hi, for instance like.
type span struct {
	dimension
	like, lo, hi string
}

// quantity reads a value with a unit from lo to hi, in SI units.
func (m *mapping) quantity(key string, d dimension, fallback, lo, hi string) float64 {
	v, ok := m.within(key, span{d, fallback, lo, hi})
	if !ok {
		return d.must(fallback)
	}
	return v
}

// quantityOr reads like quantity, or a word that stands for 0.
func (m *mapping) quantityOr(key, word string, d dimension, fallback, lo, hi string) float64 {
	if n := m.values[key]; n != nil && n.Value == word {
		m.take(key)
		return 0
	}
	v, ok := m.within(key, span{d, word + " or " + lo, lo, hi})
	if !ok && fallback != word {
		return d.must(fallback)
	}
	return v
}

func (m *mapping) within(key string, s span) (value float64, ok bool) {
	text, line, ok := m.scalar(key, s.name+" such as "+s.like)
	if !ok {
		return 0, false
	}
	return m.measured(text, line, join(m.path, key), s)
}

// measured reads a text that stands in a line.
func (f *file) measured(text string, line int, path string, s span) (value float64, ok bool) {
	least, most := s.must(s.lo), s.must(s.hi)
	value, wrong := s.parse(text)
	switch {
	case wrong != nil:
		if hint := s.bareHint(text, least, most); hint != "" {
			wrong.hint = hint
		}
		if wrong.hint == "" {
			wrong.hint = "write it like " + s.like
		}
		f.fail(line, path, wrong.reason, wrong.hint)
	case value < least:
		f.fail(line, path, fmt.Sprintf("%s is less than %s", show(text), s.lo), between(s.lo, s.hi))
	case value > most:
		f.fail(line, path, fmt.Sprintf("%s is more than %s", show(text), s.hi), between(s.lo, s.hi))
	default:
		return value, true
	}
	return 0, false
}

func between(lo, hi string) string { return "possible is " + lo + " to " + hi }

// number reads a value without unit.
func (m *mapping) number(key, fallback, lo, hi string) float64 {
	return m.quantity(key, plain, fallback, lo, hi)
}

var wholeNumber = regexp.MustCompile(`^[+-]?[0-9]+$`)

// integer reads a whole number from lo to hi.
func (m *mapping) integer(key string, fallback, lo, hi int) int {
	text, line, ok := m.scalar(key, fmt.Sprintf("a whole number such as %d", fallback))
	if !ok {
		return fallback
	}
	hint := between(strconv.Itoa(lo), strconv.Itoa(hi))
	v, err := strconv.Atoi(text)
	switch {
	case !wholeNumber.MatchString(text):
		m.fail(line, join(m.path, key), show(text)+" is not a whole number", hint)
	case err != nil || v < lo || v > hi:
		m.fail(line, join(m.path, key), fmt.Sprintf("%s is not from %d to %d", show(text), lo, hi), hint)
	default:
		return v
	}
	return fallback
}

// choice reads one of a few words.
func (m *mapping) choice(key, fallback string, words ...string) string {
	text, line, ok := m.scalar(key, "one of "+strings.Join(words, ", "))
	if !ok {
		return fallback
	}
	if slices.Contains(words, text) {
		return text
	}
	hint := "possible is " + words[0]
	if near := nearest(text, words); near != "" {
		hint = "did you mean " + near + "?"
	}
	m.fail(line, join(m.path, key), fmt.Sprintf("%s is not one of %s", show(text), strings.Join(words, ", ")), hint)
	return fallback
}

// flag reads true or false.
func (m *mapping) flag(key string, fallback bool) bool {
	return m.choice(key, strconv.FormatBool(fallback), "true", "false") == "true"
}

// freeText reads text in one line of at most 200 characters.
func (m *mapping) freeText(key string) string {
	text, line, ok := m.scalar(key, "text")
	if ok {
		m.checkText(text, line, join(m.path, key))
	}
	return text
}

func (f *file) checkText(text string, line int, path string) {
	const most = 200
	switch {
	case strings.ContainsFunc(text, unicode.IsControl):
		f.fail(line, path, "has a control character or a line break", "write it in one line")
	case len([]rune(text)) > most:
		f.fail(line, path, fmt.Sprintf("has more than %d characters", most), "shorten it")
	}
}

// integerOr reads like integer, or a word that stands for 0.
func (m *mapping) integerOr(key, word string, fallback, lo, hi int) int {
	if n := m.values[key]; n != nil && n.Value == word {
		m.take(key)
		return 0
	}
	return m.integer(key, fallback, lo, hi)
}
