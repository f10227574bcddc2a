package measure

// Air is the air between source and microphone.
type Air struct {
	Temperature            float64 // K
	TemperatureUncertainty float64 // standard, K
	Humidity               float64 // relative, 0 to 1
	Pressure               float64 // Pa
}
