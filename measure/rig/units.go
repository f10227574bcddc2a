package rig

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// unit turns a number into SI units: (value + offset)·num/den. A quotient of
// whole numbers, because value/1000 is the nearest float64 to the decimal that
// was written and value·0.001 often is not.
type unit struct {
	name             string
	offset, num, den float64
}

// dimension is a kind of quantity with the units it may be written in, the
// usual one first.
type dimension struct {
	name  string // with its article
	units []unit
	after func(float64) float64 // applied last; nil for nothing
}

// The dimensions. The inch is 25.4 mm and the foot 304.8 mm exactly
// (international yard and pound agreement, 1959); 0 °C is 273.15 K and a kelvin
// 1.8 degrees Fahrenheit exactly (BIPM SI Brochure, 9th ed., sec. 2.3.1; NIST
// SP 811, app. B).
var (
	length = dimension{name: "a length", units: []unit{
		{"mm", 0, 1, 1000}, {"m", 0, 1, 1}, {"cm", 0, 1, 100}, {"in", 0, 254, 10000}, {"ft", 0, 3048, 10000}}}
	temperature = dimension{name: "a temperature", units: []unit{
		{"C", 273.15, 1, 1}, {"F", 459.67, 5, 9}, {"K", 0, 1, 1}}}
	temperatureDifference = dimension{name: "a temperature difference", units: []unit{
		{"C", 0, 1, 1}, {"F", 0, 5, 9}, {"K", 0, 1, 1}}}
	level = dimension{name: "a level", after: fromDecibels, units: []unit{
		{"dBFS", 0, 1, 1}, {"dB", 0, 1, 1}}}
	frequency = dimension{name: "a frequency", units: []unit{
		{"Hz", 0, 1, 1}, {"kHz", 0, 1000, 1}}}
	duration = dimension{name: "a time", units: []unit{
		{"s", 0, 1, 1}, {"ms", 0, 1, 1000}}}
	percentage = dimension{name: "a percentage", units: []unit{
		{"%", 0, 1, 100}}}
	pressure = dimension{name: "a pressure", units: []unit{
		{"kPa", 0, 1000, 1}, {"hPa", 0, 100, 1}, {"Pa", 0, 1, 1}}}
	clockOffset = dimension{name: "a clock offset", units: []unit{
		{"ppm", 0, 1, 1e6}}}
	plain = dimension{name: "a number", units: []unit{
		{"", 0, 1, 1}}}
)

// fromDecibels is the amplitude ratio 10^(L/20) of a level L in dB.
func fromDecibels(db float64) float64 { return math.Pow(10, db/20) }

func (u unit) si(value float64) float64 { return (value + u.offset) * u.num / u.den }

// in is value·unit in SI.
func (d dimension) in(value float64, u unit) float64 {
	if d.after == nil {
		return u.si(value)
	}
	return d.after(u.si(value))
}

// complaint says what is wrong with a value, before it is known where it stands.
type complaint struct {
	reason string
	hint   string // "" when only the reader knows a good example
}

// Written numbers are decimal, with a point, and a digit on both sides of it:
// distances become file names, and one must not begin with a dot.
var written = regexp.MustCompile(`^([+-]?[0-9]+(?:\.[0-9]+)?)\s*([^\s.].*)?$`)

// mostDigits keeps numbers within what a float64 and a file name can hold.
const mostDigits = 20

// parse reads a number with its unit and returns the value in SI units, or what
// is wrong with it.
func (d dimension) parse(text string) (float64, *complaint) {
	parts := written.FindStringSubmatch(text)
	if parts == nil || strings.Contains(text, ",") {
		return 0, d.notANumber(text)
	}
	if len(parts[1]) > mostDigits {
		return 0, &complaint{show(text) + " has too many digits", fmt.Sprintf("at most %d characters", mostDigits)}
	}
	value, err := strconv.ParseFloat(parts[1], 64)
	if err != nil {
		return 0, d.notANumber(text)
	}
	for _, u := range d.units {
		if u.name == parts[2] {
			return d.in(value, u), nil
		}
	}
	return 0, d.wrongUnit(text, parts[1], parts[2])
}

// must is parse for the constants of this package.
func (d dimension) must(text string) float64 {
	v, wrong := d.parse(text)
	if wrong != nil {
		panic("rig: " + wrong.reason)
	}
	return v
}

var (
	notFinite = regexp.MustCompile(`(?i)^[+-]?\.?(nan|inf|infinity)\b`)
	thousands = regexp.MustCompile(`^[+-]?[0-9]{1,3},[0-9]{3}[^0-9]*$`)
	halfPoint = regexp.MustCompile(`^([+-]?)([0-9]*)\.([0-9]*)\s*([^0-9.]*)$`)
)

// notANumber finds out why a text does not begin with a number.
func (d dimension) notANumber(text string) *complaint {
	cured := strings.NewReplacer("−", "-", ",", ".").Replace(text)
	switch {
	case notFinite.MatchString(text):
		return &complaint{show(text) + " is not a finite number", ""}
	case thousands.MatchString(text) && d.valid(cured):
		return &complaint{show(text) + " has a comma", "write " + strings.ReplaceAll(text, ",", "") + ", or " + cured}
	case strings.Contains(text, ",") && d.valid(cured):
		return &complaint{show(text) + " has a decimal comma", "write " + cured}
	case d.valid(cured):
		return &complaint{show(text) + " has a typographic minus sign", "write " + cured}
	}
	if cured := withDigits(text); d.valid(cured) {
		return &complaint{show(text) + " lacks a digit beside the point", "write " + cured}
	}
	return &complaint{fmt.Sprintf("%s is not %s", show(text), d.name), ""}
}

// withDigits turns .5m into 0.5m and 5.m into 5m, and other texts into nothing.
func withDigits(text string) string {
	p := halfPoint.FindStringSubmatch(text)
	switch {
	case p == nil:
		return ""
	case p[2] == "":
		return p[1] + "0." + p[3] + p[4]
	}
	return p[1] + p[2] + p[4]
}

func (d dimension) valid(text string) bool {
	if strings.Contains(text, ",") || !written.MatchString(text) {
		return false // parse would ask notANumber again
	}
	_, wrong := d.parse(text)
	return wrong == nil
}

func (d dimension) wrongUnit(text, number, name string) *complaint {
	names := make([]string, len(d.units))
	hint := ""
	for i, u := range d.units {
		names[i] = u.name
		if strings.EqualFold(u.name, name) {
			hint = "write " + number + u.name
		}
	}
	if hint == "" {
		hint = "units are " + strings.Join(names, ", ")
	}
	switch {
	case name == "":
		return &complaint{show(text) + " has no unit", hint}
	case d.units[0].name == "" && name == "%":
		return &complaint{show(text) + " is not a number without unit", "as a fraction: 50% is 0.5"}
	case d.units[0].name == "":
		return &complaint{show(text) + " is not a number without unit", "write " + number}
	}
	return &complaint{fmt.Sprintf("%s is not a unit of %s", show(name), strings.TrimPrefix(d.name, "a ")), hint}
}

// bareHint proposes a unit for a number without one: the first in which the
// value is possible, so that a distance of 0.05 is metres and 50 millimetres.
func (d dimension) bareHint(text string, lo, hi float64) string {
	if parts := written.FindStringSubmatch(text); parts == nil || parts[2] != "" {
		return ""
	}
	value, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return ""
	}
	for _, u := range d.units {
		if v := d.in(value, u); v >= lo && v <= hi {
			return "write " + text + u.name
		}
	}
	return ""
}
