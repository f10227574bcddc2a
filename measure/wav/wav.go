// Package wav reads and writes WAV files: PCM of 16, 24 and 32 bits and 32-bit
// float, 1 to 8 channels, with the plain and the extensible format chunk, and
// RF64 for what is longer than 4 GB.
//
// Sources: IBM and Microsoft, Multimedia Programming Interface and Data
// Specifications 1.0 (1991), for RIFF, its chunks and their padding; Microsoft,
// Multiple Channel Audio Data and WAVE Files (2001), for WAVE_FORMAT_EXTENSIBLE;
// EBU Tech 3306, RF64: An Extended File Format for Audio (2009).
//
// An integer sample of n bits is divided by 2^(n−1) on reading; on writing it is
// multiplied by that, rounded to nearest and limited to the n bits. In memory
// samples are float32, which hold 24 bits: 16-bit, 24-bit and float files come
// back bit for bit, 32-bit integers lose what is finer than 2^−24 of the sample.
//
// A reader of measurements must not guess. A file that is shorter or longer than
// its header says is an error that tells where, never a shorter recording.
// Chunks that are neither format nor samples are skipped, "fact" included: for
// PCM and float it repeats what the data chunk says, and is often wrong.
package wav

import (
	"errors"
	"fmt"
	"os"
)

// Format is how the samples are kept in the file.
type Format struct {
	SampleRate int  // Hz, 1 to 2^24
	Channels   int  // 1 to 8
	Bits       int  // of one sample: 16, 24 or 32
	Float      bool // IEEE 754 instead of integers; 32 bits only
}

// File is a decoded file. All channels are equally long. Float files may hold
// values beyond full scale, infinities and NaN: they are kept as they are, bit
// for bit, and judged by whoever uses them.
type File struct {
	Format
	Samples [][]float32 // [channel][frame], full scale ±1
}

// ErrFormat marks a file that is not a WAV file, is damaged or cut, or is of a
// kind that this package does not read. An error of the disk is not ErrFormat.
var ErrFormat = errors.New("not a readable WAV file")

// formatError is an ErrFormat that says what is wrong.
type formatError string

func (e formatError) Error() string        { return string(e) }
func (e formatError) Is(target error) bool { return target == ErrFormat }

func bad(format string, args ...any) error {
	return formatError(fmt.Sprintf(format, args...))
}

// Validate reports the first thing about a format that this package can neither
// read nor write.
func (f Format) Validate() error {
	switch {
	case f.SampleRate < 1 || f.SampleRate > 1<<24:
		return fmt.Errorf("a sample rate of %d Hz", f.SampleRate)
	case f.Channels < 1 || f.Channels > 8:
		return fmt.Errorf("%d channels, not 1 to 8", f.Channels)
	case f.Float && f.Bits != 32:
		return fmt.Errorf("float samples of %d bits, not 32", f.Bits)
	case f.Bits != 16 && f.Bits != 24 && f.Bits != 32:
		return fmt.Errorf("samples of %d bits, not 16, 24 or 32", f.Bits)
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
