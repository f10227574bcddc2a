package rig

import (
	"errors"
	"fmt"
	"io/fs"
	"regexp"
	"slices"
	"strings"

	"gopkg.in/yaml.v3"

	"standoff/measure"
)

func readUnit(m *mapping) Unit {
	defer m.close()
	m.require("tag", "RB-07")
	return Unit{
		Tag:      readTag(m),
		Serial:   m.freeText("serial"),
		Claimed:  m.choice("claimed", "", Patterns...),
		Powering: m.choice("powering", "none", "none", "phantom", "external"),
	}
}

var safeTag = regexp.MustCompile(`^[A-Za-z0-9_][A-Za-z0-9._-]{0,63}$`)

// CheckTag says what keeps a tag from being the name of a folder; nil if nothing.
func CheckTag(tag string) error {
	if safeTag.MatchString(tag) {
		return nil
	}
	return fmt.Errorf("%s cannot name a folder", show(tag))
}

// TagRule is the hint for a tag that CheckTag refuses.
const TagRule = "use up to 64 letters, digits, dots, dashes and underscores, no dot or dash first"

func readTag(m *mapping) string {
	tag, line, ok := m.scalar("tag", "a tag such as RB-07")
	if !ok {
		return ""
	}
	if err := CheckTag(tag); err != nil {
		m.fail(line, join(m.path, "tag"), err.Error(), TagRule)
	}
	return tag
}

func readCapsule(m *mapping) Capsule {
	defer m.close()
	return Capsule{
		Model:              m.choice("model", "auto", "auto", "summed", "phase-shift"),
		Body:               m.choice("body", "auto", "auto", "open", "sphere"),
		Setback:            m.quantity("setback", length, "6mm", "0mm", "200mm"),
		SetbackUncertainty: m.quantity("setback_uncertainty", length, "1mm", "0.01mm", "100mm"),
	}
}

// readSource reads the loudspeaker, from a file of its own where source.from names
// one; then the rig itself may only add the polarity.
func readSource(m *mapping) Source {
	defer m.close()
	from, line, ok := m.scalar("from", "the path of a file that standoff source wrote")
	if !ok {
		return readSourceKeys(m)
	}
	polarity := m.choice("polarity", "unknown", "unknown", "normal", "reversed")
	for _, key := range m.keys {
		if path := join(m.path, key.Value); key.Value != "from" && key.Value != "polarity" {
			m.known = append(m.known, key.Value)
			m.fail(key.Line, path, "stands in "+show(from)+" already", "remove it here, or remove source.from")
		}
	}
	s := m.includedSource(from, line)
	if m.values["polarity"] != nil {
		s.Polarity = polarity
	}
	return s
}

func readSourceKeys(m *mapping) Source {
	s := Source{
		Kind:              m.choice("kind", "piston", "point", "piston"),
		Radius:            m.quantity("radius", length, "17mm", "1mm", "200mm"),
		RadiusUncertainty: m.quantity("radius_uncertainty", length, "1mm", "0.01mm", "100mm"),
		Centre:            m.quantity("centre", length, "0mm", "-200mm", "200mm"),
		CentreUncertainty: m.quantity("centre_uncertainty", length, "0mm", "0mm", "100mm"),
		Polarity:          m.choice("polarity", "unknown", "unknown", "normal", "reversed"),
	}
	if s.Kind == "point" {
		s.Radius, s.RadiusUncertainty = 0, 0
	}
	return s
}

// includedSource reads the file that source.from names: the keys of source, at the top.
func (m *mapping) includedSource(name string, line int) Source {
	key := join(m.path, "from")
	path, raw, err := m.include(name)
	if err != nil {
		m.fail(line, key, fmt.Sprintf("cannot read %s: %v", show(path), reasonOf(err)), "the path starts from where the rig is; standoff source writes such a file")
		return Source{}
	}
	f := &file{name: path, found: map[string]*yaml.Node{}}
	var s Source
	if root := f.document(raw); root != nil {
		inner := f.mapping(root, "", root.Line)
		if inner.state != broken {
			inner.require("radius", "17mm")
			inner.require("radius_uncertainty", "0.5mm")
			s = readSourceKeys(inner)
			inner.close()
		}
	}
	m.errs = append(m.errs, f.errs...)
	s.From, s.Raw = name, raw
	return s
}

// reasonOf is what went wrong with a file, without its name.
func reasonOf(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

func readAir(m *mapping) measure.Air {
	defer m.close()
	return measure.Air{
		Temperature:            m.quantity("temperature", temperature, "21C", "-40C", "60C"),
		TemperatureUncertainty: m.quantity("temperature_uncertainty", temperatureDifference, "1C", "0.01C", "20C"),
		Humidity:               m.quantity("humidity", percentage, "45%", "0%", "100%"),
		Pressure:               m.quantity("pressure", pressure, "101.3kPa", "50kPa", "120kPa"),
	}
}

func readSweep(m *mapping) Sweep {
	defer m.close()
	return Sweep{
		From:     m.quantity("from", frequency, "20Hz", "1Hz", "90kHz"),
		To:       m.quantity("to", frequency, "20kHz", "1Hz", "90kHz"),
		Duration: m.quantity("duration", duration, "5s", "0.5s", "60s"),
		Level:    m.quantity("level", level, "-20dBFS", "-100dBFS", "0dBFS"),
		Repeats:  m.integer("repeats", 2, 1, 20),
		Before:   m.quantity("before", duration, "0.6s", "0s", "30s"),
		After:    m.quantity("after", duration, "0.8s", "0.1s", "30s"),
	}
}

func readAudio(m *mapping) Audio {
	defer m.close()
	return Audio{
		Backend:         m.choice("backend", "portaudio", "virtual", "portaudio", "wav"),
		SampleRate:      m.integer("sample_rate", 48000, 8000, 192000),
		Clock:           m.choice("clock", "auto", "common", "free", "auto"),
		Input:           m.freeText("input"),
		Output:          m.freeText("output"),
		InputChannel:    m.integer("input_channel", 1, 1, 256),
		OutputChannel:   m.integer("output_channel", 1, 1, 256),
		LoopbackChannel: m.integerOr("loopback_channel", "none", 0, 0, 256),
	}
}

func readFit(m *mapping) Fit {
	defer m.close()
	return Fit{
		From: m.quantity("from", frequency, "80Hz", "1Hz", "90kHz"),
		To:   m.quantity("to", frequency, "5kHz", "1Hz", "90kHz"),
		Gate: m.quantityOr("gate", "auto", duration, "auto", "1ms", "500ms"),
	}
}

func readMover(m *mapping) *Mover {
	if m.state == leftOut {
		return nil
	}
	defer m.close()
	m.require("command", `["./slide", "--to", "{distance_mm}"]`)
	return &Mover{
		Command: readCommand(m),
		Settle:  m.quantity("settle", duration, "1s", "0s", "10s"),
	}
}

// Placeholders are replaced in the arguments of a mover's command.
var Placeholders = []string{"{distance_mm}", "{distance_label}", "{index}"}

var placeholder = regexp.MustCompile(`\{[a-z_]+\}`)

func readCommand(m *mapping) []string {
	var command []string
	for _, e := range m.list("command", 1, 64, "a list of program and arguments", `write command: ["./slide", "--to", "{distance_mm}"]`) {
		text, ok := m.textOf(e.node, e.path, "text")
		if !ok {
			continue
		}
		m.checkText(text, e.node.Line, e.path)
		m.checkPlaceholders(text, e)
		command = append(command, text)
	}
	if len(command) > 0 && command[0] == "" {
		m.fail(m.lineOf("command"), index(join(m.path, "command"), 0), "the program has no name", "")
	}
	return command
}

func (f *file) checkPlaceholders(text string, e entry) {
	for _, p := range placeholder.FindAllString(text, -1) {
		if !slices.Contains(Placeholders, p) {
			f.fail(e.node.Line, e.path, show(p)+" is not replaced by anything", "possible is "+strings.Join(Placeholders, " "))
		}
	}
}
