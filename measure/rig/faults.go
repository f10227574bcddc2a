package rig

import "standoff/measure"

// faultKinds are the values of virtual.faults[].kind.
var faultKinds = []string{"clip", "dropout", "dead", "wrong-distance", "reversed", "gain"}

func readFaults(m *mapping, distances []measure.Distance) []VirtualFault {
	if m.values["faults"] == nil {
		m.take("faults")
		return nil
	}
	var out []VirtualFault
	for _, e := range m.list("faults", 0, 1000, "a list of faults", "write faults: [{kind: clip, distance: 50mm, take: 1}]") {
		out = append(out, readFault(m.mapping(e.node, e.path, e.node.Line), distances))
	}
	return out
}

func readFault(m *mapping, distances []measure.Distance) VirtualFault {
	defer m.close()
	m.require("kind", "clip")
	fault := VirtualFault{
		Take: m.integer("take", 0, 0, 1000),
		Kind: m.choice("kind", faultKinds[0], faultKinds...),
	}
	if text, line, ok := m.scalar("distance", "a distance such as 50mm"); ok {
		fault.Distance, _ = m.findDistance(distances, text, line, join(m.path, "distance"))
	}
	switch fault.Kind {
	case "wrong-distance":
		m.require("amount", "20mm")
		fault.Amount = m.quantity("amount", length, "20mm", "-1m", "1m")
	case "gain":
		m.require("amount", "2")
		fault.Amount = m.nonZero("amount", "2")
	default:
		m.refuse("amount", "the fault "+fault.Kind+" has no amount", "remove it")
	}
	return fault
}

// checkReach refuses a capsule that would reach through the plane of the source:
// its front port is half the spacing before its centre, or on a sphere a third
// of it (d = 3a).
func (m *mapping) checkReach(v *Virtual, distances []measure.Distance) {
	const gap = 0.1e-3 // m
	if len(m.errs) > 0 {
		return
	}
	front := v.Capsule.PortSpacing / 2
	if v.Capsule.Body == "sphere" {
		front = v.Capsule.PortSpacing / 3
	}
	for _, d := range distances {
		if v.nearest(d)+v.Capsule.Setback-front < gap {
			m.fail(m.line, m.path, "at "+d.Label+" the true capsule would touch the source",
				"mind port_spacing, setback, tape_errors and faults, or leave out "+d.Label)
			return
		}
	}
}

// nearest is how near the grille comes in any take at d, in m, random tape
// errors apart.
func (v *Virtual) nearest(d measure.Distance) float64 {
	moved := 0.0
	for _, fault := range v.Faults {
		if fault.Kind == "wrong-distance" && (fault.Distance == "" || fault.Distance == d.Label) {
			moved = min(moved, fault.Amount)
		}
	}
	return d.Metres + v.TapeErrors[d.Label] + moved
}
