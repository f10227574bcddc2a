//go:build !linux && cgo && !noaudio

package portaudio

// quiet has nothing to do here.
func quiet() {}
