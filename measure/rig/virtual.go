package rig

import (
	"fmt"
	"strconv"

	"gopkg.in/yaml.v3"

	"standoff/measure"
)

// readVirtual reads the truth of the virtual bench. It may stand in the rig of a
// real bench, so that a rig can be switched; a virtual one may leave it out.
func readVirtual(m *mapping, r *Rig) *Virtual {
	if m.state == leftOut && r.Audio.Backend != "virtual" {
		return nil
	}
	defer m.close()
	v := &Virtual{
		Seed:        m.seed(),
		RealTime:    m.flag("real_time", false),
		Capsule:     readVirtualCapsule(m.section("capsule")),
		Source:      readVirtualSource(m.section("source")),
		Room:        readRoom(m),
		Noise:       m.quantityOr("noise", "none", level, "-95dBFS", "-200dBFS", "0dBFS"),
		Bits:        m.bits(),
		Latency:     m.quantity("latency", duration, "12ms", "0ms", "2s"),
		ClockOffset: m.quantity("clock_offset", clockOffset, "0ppm", "-1000ppm", "1000ppm"),
		Loopback:    m.flag("loopback", false),
		TapeErrors:  readTapeErrors(m.section("tape_errors"), r.Distances),
		TapeError:   m.quantity("tape_error", length, "0mm", "0mm", "100mm"),
		Faults:      readFaults(m, r.Distances),
	}
	v.Hum, v.HumFrequency = readHum(m)
	m.checkReach(v, r.Distances)
	return v
}

func (m *mapping) seed() uint64 {
	text, line, ok := m.scalar("seed", "a whole number such as 1")
	if !ok {
		return 1
	}
	seed, err := strconv.ParseUint(text, 10, 64)
	if err != nil {
		m.fail(line, join(m.path, "seed"), show(text)+" is not a whole number from 0 to 2^64-1", "write seed: 1")
	}
	return seed
}

func (m *mapping) bits() int {
	bits, _ := strconv.Atoi(m.choice("bits", "24", "24", "16", "none")) // none is 0
	return bits
}

func readVirtualCapsule(m *mapping) VirtualCapsule {
	defer m.close()
	c := VirtualCapsule{
		Form:             m.choice("form", "phase-shift", "phase-shift", "summed"),
		Body:             m.choice("body", "sphere", "sphere", "open"),
		Rear:             m.choice("rear", "delay", "delay", "low-pass"),
		GradientFraction: m.number("gradient_fraction", "0.5", "0", "1"),
		GradientFrom:     m.quantityOr("gradient_from", "none", frequency, "none", "0.1Hz", "20kHz"),
		PortSpacing:      m.quantity("port_spacing", length, "27mm", "0.1mm", "500mm"),
		Setback:          m.quantity("setback", length, "6mm", "0mm", "200mm"),
		Sensitivity:      m.nonZero("sensitivity", "0.5"),
		Resonance:        m.quantityOr("resonance", "none", frequency, "none", "1Hz", "90kHz"),
		ResonanceQ:       m.number("resonance_q", "0.7", "0.05", "100"),
		HighPass:         m.quantityOr("high_pass", "none", frequency, "none", "0.1Hz", "20kHz"),
	}
	// The rear delay of a phase-shift capsule grows without bound for β → 0.
	if key := "gradient_fraction"; c.Form == "phase-shift" && c.GradientFraction < 0.02 && m.sound(join(m.path, key)) {
		m.fail(m.lineOf(key), join(m.path, key), "phase-shift makes no capsule with less than 0.02 of gradient", "write form: summed")
	}
	// One diaphragm cannot lose its gradient and keep its pressure.
	if key := "gradient_from"; c.Form == "phase-shift" && c.GradientFrom != 0 && m.sound(join(m.path, key), join(m.path, "form")) {
		m.fail(m.lineOf(key), join(m.path, key), "phase-shift has one diaphragm, whose mix is the same at all frequencies", "write form: summed, or gradient_from: none")
	}
	return c
}

// nonZero reads a gain; a gain of nought is what the fault dead is for.
func (m *mapping) nonZero(key, fallback string) float64 {
	gain := m.number(key, fallback, "-1000", "1000")
	if path := join(m.path, key); gain == 0 && m.sound(path) {
		m.fail(m.lineOf(key), path, "0 would be silence", "the fault dead makes a silent take")
	}
	return gain
}

func readVirtualSource(m *mapping) VirtualSource {
	defer m.close()
	return VirtualSource{
		Radius:   m.quantity("radius", length, "17mm", "0mm", "500mm"),
		HighPass: m.quantityOr("high_pass", "none", frequency, "90Hz", "0.1Hz", "20kHz"),
		RollOff:  m.quantityOr("roll_off", "none", frequency, "16kHz", "100Hz", "90kHz"),
		Second:   m.quantity("second", percentage, "0.2%", "-30%", "30%"),
		Third:    m.quantity("third", percentage, "0.1%", "-30%", "30%"),
	}
}

// orNone opens a section that may be the word none instead.
func (m *mapping) orNone(key string) (section *mapping, none bool) {
	if n := m.values[key]; n != nil && n.Kind == yaml.ScalarNode && n.Value == "none" {
		m.take(key)
		return nil, true
	}
	return m.section(key), false
}

func readRoom(m *mapping) *VirtualRoom {
	s, none := m.orNone("room")
	if none {
		return nil
	}
	defer s.close()
	room := &VirtualRoom{
		Size:       [3]float64{5, 4, 2.7},
		Reflection: s.number("reflection", "0.5", "0", "0.99"),
	}
	sides := s.list("size", 3, 3, "a list of lengths", "write size: [5m, 4m, 2.7m]")
	for i, e := range sides {
		if text, ok := s.textOf(e.node, e.path, "a length such as 4m"); ok {
			room.Size[i], _ = s.measured(text, e.node.Line, e.path, span{length, "4m", "0.5m", "100m"})
		}
	}
	return room
}

func readHum(m *mapping) (amplitude, fundamental float64) {
	s, none := m.orNone("hum")
	if none || s.state == leftOut {
		return 0, 50
	}
	defer s.close()
	s.require("level", "-70dBFS")
	return s.quantity("level", level, "-70dBFS", "-200dBFS", "0dBFS"),
		s.quantity("frequency", frequency, "50Hz", "1Hz", "1kHz")
}

func readTapeErrors(m *mapping, distances []measure.Distance) map[string]float64 {
	out := map[string]float64{}
	if n := len(m.keys); n > mostDistances {
		m.fail(m.line, m.path, fmt.Sprintf("%d errors where at most %d distances are", n, mostDistances), "")
		return out
	}
	for _, key := range m.keys {
		path := join(m.path, key.Value)
		by := m.quantity(key.Value, length, "0mm", "-1m", "1m")
		label, ok := m.findDistance(distances, key.Value, key.Line, path)
		if !ok {
			continue
		}
		if _, twice := out[label]; twice {
			m.fail(key.Line, path, "a second error for "+label, "remove one of them")
		}
		out[label] = by
	}
	return out
}
