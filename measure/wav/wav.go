// Package wav reads and writes WAV files: PCM of 16, 24 and 32 bits and 32-bit
// float, 1 to 8 channels, with the plain and the extensible format chunk, and
// RF64 for what is longer than 4 GB.
//
// Sources: Microsoft and IBM, Multimedia Programming Interface and Data
// Specifications 1.0 (1991), for RIFF; Microsoft, Multiple Channel Audio Data and
// WAVE Files (2001), for the extensible format; EBU Tech 3306 (2009) for RF64.
//
// Integer samples of n bits are divided by 2^(n−1) on reading, and multiplied,
// rounded and limited on writing. In memory they are float32, which holds 24 bits;
// the lowest 8 of a 32-bit integer are rounded away.
package wav

import (
	"errors"
	"fmt"
	"os"
)

// Format is how the samples are kept in the file.
type Format struct {
	SampleRate int  // Hz
	Channels   int  // 1 to 8
	Bits       int  // 16, 24, 32
	Float      bool // 32 bits only
}

// File is a decoded file: Samples[channel][frame], full scale ±1. Float files may
// hold more than full scale, and values that are no numbers.
type File struct {
	Format
	Samples [][]float32
}

// ErrFormat marks a file that is not a WAV file, is damaged, or is of a kind that
// this package does not read. Test with errors.Is.
var ErrFormat = errors.New("not a readable WAV file")

func bad(format string, args ...any) error {
	return fmt.Errorf("%w: %s", ErrFormat, fmt.Sprintf(format, args...))
}

// Valid reports what is wrong with a format.
func (f Format) Valid() error {
	switch {
	case f.SampleRate < 1 || f.SampleRate > 1<<24:
		return bad("a sample rate of %d Hz", f.SampleRate)
	case f.Channels < 1 || f.Channels > 8:
		return bad("%d channels; 1 to 8 can be read", f.Channels)
	case f.Float && f.Bits != 32:
		return bad("%d-bit float; 32-bit can be read", f.Bits)
	case f.Bits != 16 && f.Bits != 24 && f.Bits != 32:
		return bad("%d bits a sample; 16, 24 and 32 can be read", f.Bits)
	}
	return nil
}

// frame is the number of bytes of one sample of every channel.
func (f Format) frame() int { return f.Channels * f.Bits / 8 }

// ReadFile decodes a file; errors name it.
func ReadFile(path string) (*File, error) {
	in, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	f, err := Decode(in)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return f, nil
}
