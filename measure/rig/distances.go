package rig

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"standoff/measure"
)

const (
	mostDistances = 64
	same          = 1e-6 // m: no tape tells these apart
)

var placed = span{length, "50mm", "1mm", "20m"}

func readDistances(m *mapping) []measure.Distance {
	entries := m.list("distances", 2, mostDistances, "a list of lengths", "write distances: [30mm, 60mm, 120mm]")
	var out []measure.Distance
	for _, e := range entries {
		text, ok := m.textOf(e.node, e.path, "a length such as 50mm")
		if !ok {
			continue
		}
		if metres, ok := m.measured(text, e.node.Line, e.path, placed); ok {
			m.checkTwice(e, text, out, metres)
			out = append(out, measure.Distance{Label: labelOf(text), Metres: metres})
		}
	}
	return out
}

// labelOf is a distance as written, without spaces. A number with its unit has
// only letters, digits and a point inside, so it is safe in a file name.
func labelOf(text string) string {
	return strings.TrimPrefix(strings.Join(strings.Fields(text), ""), "+")
}

func (m *mapping) checkTwice(e entry, text string, before []measure.Distance, metres float64) {
	for _, d := range before {
		if math.Abs(d.Metres-metres) < same {
			m.fail(e.node.Line, e.path, fmt.Sprintf("%s is in the list already, as %s", show(text), d.Label),
				"remove one; sweep.repeats sets the takes at each distance")
			return
		}
	}
}

// findDistance is the label in the list of a distance however written. A word
// that is no distance of the list is an error at path.
func (f *file) findDistance(list []measure.Distance, text string, line int, path string) (label string, ok bool) {
	metres, ok := f.measured(text, line, path, placed)
	if !ok {
		return "", false
	}
	labels := make([]string, len(list))
	for i, d := range list {
		labels[i] = d.Label
		if math.Abs(d.Metres-metres) < same {
			return d.Label, true
		}
	}
	if f.sound("distances") && len(list) > 0 {
		f.fail(line, path, show(text)+" is not one of the distances", "distances are "+strings.Join(labels, ", "))
	}
	return "", false
}

// Duration reads a time with its unit, such as 6ms, in s.
func Duration(text string) (float64, error) { return read(duration, text) }

// Percentage reads a percentage, such as 0.1%, as a ratio.
func Percentage(text string) (float64, error) { return read(percentage, text) }

func read(d dimension, text string) (float64, error) {
	v, wrong := d.parse(strings.TrimSpace(text))
	if wrong != nil {
		return 0, errors.New(wrong.reason)
	}
	return v, nil
}

// Length reads a length with its unit, such as 30mm or 2.5in, in m.
func Length(text string) (float64, error) { return read(length, text) }
