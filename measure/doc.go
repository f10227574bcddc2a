// Package measure holds the nouns of a near-field measurement and the pure
// chain that turns a recording into a spectrum with its variance:
//
//	rig → sweep → Recording → ImpulseResponse → Gate → Spectrum → fit → pages
//
// Symbols, units and signs, the same everywhere in the program:
//
//	e^{+jωt}  time factor, so a wave going outwards is e^{−jkr}/r
//	f, ω, k   frequency in Hz, ω = 2πf in rad/s, wavenumber k = ω/c in rad/m
//	c         speed of sound in m/s, from Air
//	r         distance in m from the source's reference plane to the capsule's centre
//	β         gradient fraction (the mix): 0 pressure, 0.5 cardioid, 1 figure-8
//	d         effective port spacing in m, as a far source sees it
//	b         effective radius of the source in m
//	δ         setback in m: from the grille, where the tape is held, to the capsule's centre
//	ε         error of the tape in m, one for every distance
//
// Lengths are metres, times seconds, levels linear; decibels are made only
// where a person reads them, and the unit stands in the key at a file's border.
//
// The package does no input or output and imports nothing of the program but
// measure/dsp.
package measure
