package measure

import "math"

// Air is the air between source and microphone.
type Air struct {
	Temperature            float64 // K
	TemperatureUncertainty float64 // standard, K
	Humidity               float64 // relative, 0 to 1
	Pressure               float64 // Pa
}

// carbonDioxide is the mole fraction assumed; 100 ppm change c by 0.009 m/s.
const carbonDioxide = 400e-6

// SpeedOfSound is the speed of sound at zero frequency in m/s,
//
//	c = a₀ + a₁t + a₂t² + (a₃ + a₄t + a₅t²)·x_w + (a₆ + a₇t + a₈t²)·p
//	    + (a₉ + a₁₀t + a₁₁t²)·x_c + a₁₂x_w² + a₁₃p² + a₁₄x_c² + a₁₅·x_w·p·x_c
//
// with t in °C, p in Pa, and the mole fractions x_w of water and x_c of carbon
// dioxide. Range: 0 to 30 °C, 75 to 102 kPa; within some tenths of m/s of the
// ideal-gas law well beyond. Source: O. Cramer, J. Acoust. Soc. Am. 93, 2510
// (1993).
func (a Air) SpeedOfSound() float64 {
	t, p, xc, xw := a.Temperature-273.15, a.Pressure, carbonDioxide, a.waterFraction()
	return 331.5024 + 0.603055*t - 0.000528*t*t +
		(51.471935+0.1495874*t-0.000782*t*t)*xw +
		(-1.82e-7+3.73e-8*t-2.93e-10*t*t)*p +
		(-85.20931-0.228525*t+5.91e-5*t*t)*xc -
		2.835149*xw*xw - 2.15e-13*p*p + 29.179762*xc*xc + 0.000486*xw*p*xc
}

// waterFraction is the mole fraction of water vapour, h·f·p_sv/p, with the
// saturation pressure and enhancement factor of R. S. Davis, Metrologia 29, 67
// (1992).
func (a Air) waterFraction() float64 {
	T, t := a.Temperature, a.Temperature-273.15
	enhancement := 1.00062 + 3.14e-8*a.Pressure + 5.6e-7*t*t
	saturation := math.Exp(1.2378847e-5*T*T - 1.9121316e-2*T + 33.93711047 - 6.3431645e3/T)
	return a.Humidity * enhancement * saturation / a.Pressure
}

// SpeedUncertainty is the standard uncertainty of SpeedOfSound in m/s: that of
// the temperature, ∂c/∂T ≈ c/2T, and 0.1 m/s for formula, humidity and draught.
func (a Air) SpeedUncertainty() float64 {
	return math.Hypot(a.SpeedOfSound()/(2*a.Temperature)*a.TemperatureUncertainty, 0.1)
}
