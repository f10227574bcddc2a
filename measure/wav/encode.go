package wav

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
)

// longestRIFF is the largest size that a RIFF header can give.
const longestRIFF = math.MaxUint32 - 1

// Encode writes a file: with the plain format for one or two channels of 16-bit
// PCM or float, extensible otherwise, and as RF64 where 4 GB are not enough.
// Integers are rounded to nearest, and limited to full scale, infinities too; NaN
// cannot be an integer and is refused. Float is written bit for bit. What cannot
// be written is refused before the first byte.
func Encode(w io.Writer, f *File) error { return encode(w, f, longestRIFF) }

// encode is Encode with the largest size for which RIFF is written.
func encode(w io.Writer, f *File, longest int64) error {
	if err := f.check(); err != nil {
		return fmt.Errorf("this cannot be a WAV file: %w", err)
	}
	out := bufio.NewWriterSize(w, 1<<16)
	out.Write(f.head(longest))
	f.body(out)
	if f.size()&1 == 1 {
		out.WriteByte(0)
	}
	return out.Flush() // the first error of all writes
}

func (f *File) check() error {
	if err := f.Validate(); err != nil {
		return err
	}
	if len(f.Samples) != f.Channels {
		return fmt.Errorf("%d channels of samples, but the format says %d", len(f.Samples), f.Channels)
	}
	for c, s := range f.Samples {
		if len(s) != len(f.Samples[0]) {
			return errors.New("channels differ in length")
		}
		if f.Float {
			continue
		}
		if i := slices.IndexFunc(s, isNaN); i >= 0 {
			return fmt.Errorf("sample %d of channel %d is not a number", i, c+1)
		}
	}
	return nil
}

func isNaN(v float32) bool { return v != v }

// size is the number of bytes of the samples.
func (f *File) size() int64 { return int64(len(f.Samples[0])) * int64(f.frame()) }

// head is everything before the samples.
func (f *File) head(longest int64) []byte {
	le := binary.LittleEndian
	size, frames := f.size(), int64(len(f.Samples[0]))
	chunks := f.chunk()
	if f.Float || f.extensible() {
		// Whatever is not tagged as PCM says how many frames there are.
		chunks = le.AppendUint32(append(chunks, "fact\x04\x00\x00\x00"...), uint32(min(frames, unknownSize)))
	}
	total := 4 + int64(len(chunks)) + 8 + size + size&1
	if total <= longest {
		b := append(le.AppendUint32([]byte("RIFF"), uint32(total)), "WAVE"...)
		b = append(append(b, chunks...), "data"...)
		return le.AppendUint32(b, uint32(size))
	}
	b := []byte("RF64\xff\xff\xff\xffWAVEds64\x1c\x00\x00\x00")
	b = le.AppendUint64(b, uint64(total+8+28))
	b = le.AppendUint64(b, uint64(size))
	b = le.AppendUint64(b, uint64(frames))
	b = le.AppendUint32(b, 0) // no other chunk is that long
	return append(append(b, chunks...), "data\xff\xff\xff\xff"...)
}

func (f *File) body(out *bufio.Writer) {
	b := make([]byte, 0, f.frame())
	for i := range f.Samples[0] {
		b = b[:0]
		for _, s := range f.Samples {
			b = f.appendSample(b, s[i])
		}
		if _, err := out.Write(b); err != nil {
			return // Flush says it again
		}
	}
}

func (f *File) appendSample(b []byte, v float32) []byte {
	if f.Float {
		return binary.LittleEndian.AppendUint32(b, math.Float32bits(v))
	}
	full := float64(int64(1) << (f.Bits - 1))
	n := int32(math.Max(-full, math.Min(full-1, math.RoundToEven(float64(v)*full))))
	for i := 0; i < f.Bits; i += 8 {
		b = append(b, byte(n>>i))
	}
	return b
}
