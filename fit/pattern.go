package fit

import "math"

// LevelAtAngle is the far-field output of a first-order capsule at the angle θ (in
// rad) from its axis, relative to the axis, with its sign:
//
//	S(θ) = (1−β) + β·cos θ
//
// Source: H. F. Olson, Acoustical Engineering (1957), ch. 8 (from memory).
func LevelAtAngle(beta, theta float64) float64 { return 1 - beta + beta*math.Cos(theta) }

// RandomEnergyEfficiency is the power received from all directions alike relative
// to that of a pressure microphone of the same sensitivity on the axis,
//
//	REE = (1/4π) ∫ S² dΩ = (1−β)² + β²/3,
//
// between 1/4 and 1. Source: G. Martin, Introduction to Sound Recording, sec. on
// directional characteristics, for the integral.
func RandomEnergyEfficiency(beta float64) float64 { return (1-beta)*(1-beta) + beta*beta/3 }

// DirectivityIndex is −10 lg REE in dB, 0 to 6.02.
func DirectivityIndex(beta float64) float64 { return -10 * math.Log10(RandomEnergyEfficiency(beta)) }

// DistanceFactor is REE^(−1/2): how much farther away than a pressure microphone it
// may stand for the same ratio of direct to diffuse sound, 1 to 2.
func DistanceFactor(beta float64) float64 { return 1 / math.Sqrt(RandomEnergyEfficiency(beta)) }

// NullAngle is where the output is nought, arccos(−(1−β)/β) in rad; ok is false
// for β below ½, which has no null.
func NullAngle(beta float64) (theta float64, ok bool) {
	if !(beta >= 0.5) { // NaN has none
		return 0, false
	}
	return math.Acos(-(1 - beta) / beta), true
}

// borders are the mixes up to which a pattern has its name: half-way between the
// usual coefficients omni 0, subcardioid 0.3, cardioid 0.5, supercardioid 0.63,
// hypercardioid 0.75, figure-8 1 (common practice; printed supercardioids range
// from 0.625 to 0.656).
var borders = []struct {
	upTo float64
	name string
}{
	{0.15, "omni"}, {0.4, "subcardioid"}, {0.565, "cardioid"}, {0.69, "supercardioid"},
	{0.875, "hypercardioid"}, {math.Inf(1), "figure-8"},
}

// NearestPattern is the name of the pattern whose usual mix is nearest to β.
func NearestPattern(beta float64) string {
	for _, b := range borders {
		if beta <= b.upTo {
			return b.name
		}
	}
	return ""
}
