// Package bench is a recorder without hardware: a virtual bench that computes
// what a microphone in front of a small loudspeaker would have recorded.
//
// It makes sound from geometry, and knows nothing of the formulas that are
// fitted later: the source is a set of rings of monopoles, the capsule two ports
// at which the pressure is computed, the room a lattice of mirror images.
//
//	excitation → distortion → loudspeaker → air, room → ports → capsule → preamplifier → converter
//
// One transfer function per distance carries everything linear:
//
//	H(ω) = S·r₀·A(ω)·e^{−jωt₀}·C(p_front, p_rear, p_centre; ω)
//
// with the sensitivity S, the reference distance r₀ = 30 mm, the filters A of
// loudspeaker, capsule and preamplifier, the latency t₀ and the capsule's mix C.
// The pressures are those of a source that gives e^{−jkR}/R far away, plus the
// images of the room. Time factor e^{+jωt}, SI units, full scale ±1.
//
//	file            what it does                       source
//	piston.go       loudspeaker as rings of monopoles  Kinsler et al., sec. 7.4
//	sphere.go       series for a solid capsule         Duda & Martens 1998
//	room.go         mirror images                      Allen & Berkley 1979
//	field.go        pressures at the capsule's entries
//	capsule.go      what the capsule makes of them
//	electronics.go  hum, noise, converter, faults
//
// # A mix that changes with frequency
//
// A capsule of the form summed may lose its gradient part below a frequency f₀:
//
//	β(f) = β·f²/(f₀²+f²),  output (1−β(f))·p + β(f)·g
//
// with the pressure p at the centre and the gradient g, level for a far source. So a
// cardioid becomes an omni below f₀, near and far: against the gradient's 1/(jkr) a
// first order could just hold its own, the rise would end in a shelf of 1 + βc/(2πf₀r).
// One diaphragm has no such thing: a leak to its back takes the pressure's drive away
// as well, and its resistance-controlled output would rise without end. So phase-shift
// refuses it.
//
// # Level
//
// A capsule of sensitivity 1 whose far response is flat brings the excitation
// back at its own level when it is 30 mm from a point source, and at 0.03/r of
// it at r metres. A sweep at −20 dBFS and a sensitivity of 0.5 then leave a
// figure-8 at 30 mm some 7 dB below full scale in spite of its rise, and the
// take at 600 mm 40 dB above a noise of −95 dBFS even before deconvolution.
//
// # What it leaves out
//
// Sound that goes to and fro between capsule and loudspeaker; the loudspeaker's
// directivity towards the walls, and its cabinet; more than four reflections;
// absorption in air.
package bench
