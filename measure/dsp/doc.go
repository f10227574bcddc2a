// Package dsp has the signal processing of a sweep measurement, on slices:
// the exponential sweep and its inverse, windows, fractional delay, transforms.
// It imports nothing of the program.
package dsp
