package wav

import (
	"bufio"
	"encoding/binary"
	"errors"
	"io"
	"math"
)

// longestRIFF is the largest file that 32-bit sizes can describe.
const longestRIFF = math.MaxUint32 - 8

// Encode writes a file: plain for one or two channels of 16-bit PCM or float,
// extensible otherwise, as the format asks for, and RF64 where 4 GB are not
// enough. Integers are rounded to nearest and limited to full scale; a value that
// is no number is refused for them.
func Encode(w io.Writer, f *File) error { return encode(w, f, longestRIFF) }

// encode is Encode with the size from which RF64 is written.
func encode(w io.Writer, f *File, longest int64) error {
	if err := f.check(); err != nil {
		return err
	}
	size := int64(len(f.Samples[0])) * int64(f.frame())
	out := bufio.NewWriterSize(w, 1<<16)
	out.Write(f.head(size, longest))
	if err := f.body(out); err != nil {
		return err
	}
	if size&1 == 1 {
		out.WriteByte(0)
	}
	return out.Flush()
}

func (f *File) check() error {
	if err := f.Valid(); err != nil {
		return err
	}
	if len(f.Samples) != f.Channels {
		return bad("%d channels of samples, the format says %d", len(f.Samples), f.Channels)
	}
	for _, s := range f.Samples {
		if len(s) != len(f.Samples[0]) {
			return errors.New("channels differ in length")
		}
	}
	return nil
}

func (f *File) head(size, longest int64) []byte {
	le := binary.LittleEndian
	format := f.formatChunk()
	extra := []byte{}
	if f.Float {
		// Whatever is not PCM says how many samples there are.
		extra = le.AppendUint32(append(extra, "fact\x04\x00\x00\x00"...), uint32(min(int64(len(f.Samples[0])), unknownSize)))
	}
	total := int64(4+len(format)+len(extra)+8) + size + size&1
	b := []byte{}
	shown := uint32(min(size, unknownSize))
	if total > longest {
		shown = unknownSize
		b = append(b, "RF64\xff\xff\xff\xffWAVEds64\x1c\x00\x00\x00"...)
		b = le.AppendUint64(b, uint64(total+36))
		b = le.AppendUint64(b, uint64(size))
		b = le.AppendUint64(b, uint64(len(f.Samples[0])))
		b = le.AppendUint32(b, 0)
	} else {
		b = le.AppendUint32(append(b, "RIFF"...), uint32(total))
		b = append(b, "WAVE"...)
	}
	b = append(append(b, format...), extra...)
	return le.AppendUint32(append(b, "data"...), shown)
}

func (f *File) formatChunk() []byte {
	le := binary.LittleEndian
	tag, size := uint16(tagPCM), uint32(16)
	if f.Float {
		tag, size = tagFloat, 18
	}
	extensible := f.Channels > 2 || !f.Float && f.Bits > 16
	first := tag
	if extensible {
		first, size = tagExtensible, 40
	}
	b := le.AppendUint32([]byte("fmt "), size)
	b = le.AppendUint16(b, first)
	b = le.AppendUint16(b, uint16(f.Channels))
	b = le.AppendUint32(b, uint32(f.SampleRate))
	b = le.AppendUint32(b, uint32(min(int64(f.SampleRate)*int64(f.frame()), math.MaxUint32)))
	b = le.AppendUint16(b, uint16(f.frame()))
	b = le.AppendUint16(b, uint16(f.Bits))
	switch {
	case extensible:
		b = le.AppendUint16(b, 22)
		b = le.AppendUint16(b, uint16(f.Bits))
		b = le.AppendUint32(b, 0) // channels without places of their own
		b = le.AppendUint16(b, tag)
		b = append(b, "\x00\x00\x00\x00\x10\x00\x80\x00\x00\xaa\x00\x38\x9b\x71"...)
	case f.Float:
		b = le.AppendUint16(b, 0)
	}
	return b
}

func (f *File) body(out *bufio.Writer) error {
	b := make([]byte, 0, f.frame())
	for i := range f.Samples[0] {
		b = b[:0]
		for c := range f.Samples {
			v := f.Samples[c][i]
			if !f.Float && v != v {
				return bad("sample %d of channel %d is no number", i, c+1)
			}
			b = f.appendSample(b, v)
		}
		if _, err := out.Write(b); err != nil {
			return err
		}
	}
	return nil
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
