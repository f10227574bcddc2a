package measure

import "time"

// Recording is what one take brought home: the samples of the microphone and,
// where the interface has one, of the electrical loopback, from the moment
// playback was started. Full scale is ±1.
type Recording struct {
	SampleRate int       // Hz
	Mic        []float32 // microphone
	Loopback   []float32 // electrical loopback; nil when there is none, else as long as Mic
	Overflows  int       // times the audio system said that input was lost
	Underflows int       // times the audio system said that output was late
	Started    time.Time // when the take began
}
