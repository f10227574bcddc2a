package wav

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
)

// The tags of the format chunk.
const (
	tagPCM        = 1
	tagFloat      = 3
	tagExtensible = 0xFFFE
	// unknownSize stands for a 32-bit size whose true value is in the ds64 chunk.
	unknownSize = 0xFFFFFFFF
)

// reader walks through the chunks. It trusts no size: what is not there is an
// error, and memory grows with what has been read only.
type reader struct {
	in     *bufio.Reader
	at     int64 // bytes read
	rf64   bool
	data64 int64 // size of the data chunk by ds64
	format Format
	known  bool // the format chunk has been read
}

// Decode reads a WAV file to the end of its samples. A file that ends before its
// chunks do, or whose header contradicts itself, is an error that says where.
func Decode(in io.Reader) (*File, error) {
	r := &reader{in: bufio.NewReaderSize(in, 1<<16)}
	if err := r.header(); err != nil {
		return nil, err
	}
	for {
		id, size, err := r.chunk()
		if err != nil {
			return nil, err
		}
		switch id {
		case "ds64":
			err = r.ds64(size)
		case "fmt ":
			err = r.readFormat(size)
		case "data":
			return r.data(size)
		default:
			err = r.skip(size + size&1)
		}
		if err != nil {
			return nil, fmt.Errorf("chunk %q: %w", id, err)
		}
	}
}

// full reads all of b.
func (r *reader) full(b []byte) error {
	n, err := io.ReadFull(r.in, b)
	r.at += int64(n)
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return bad("it ends after %d bytes, in the middle", r.at)
	}
	return err
}

func (r *reader) header() error {
	b := make([]byte, 12)
	if err := r.full(b); err != nil {
		return err
	}
	switch string(b[:4]) {
	case "RIFF":
	case "RF64":
		r.rf64 = true
	case "RIFX":
		return bad("its byte order is big-endian")
	default:
		return bad("it does not begin with RIFF or RF64")
	}
	if string(b[8:]) != "WAVE" {
		return bad("its kind is %q and not WAVE", b[8:])
	}
	return nil
}

func (r *reader) chunk() (id string, size int64, err error) {
	b := make([]byte, 8)
	if _, err := r.in.Peek(1); errors.Is(err, io.EOF) {
		return "", 0, bad("it has no samples: the data chunk is missing")
	}
	if err := r.full(b); err != nil {
		return "", 0, err
	}
	return string(b[:4]), int64(binary.LittleEndian.Uint32(b[4:])), nil
}

func (r *reader) skip(n int64) error {
	copied, err := io.CopyN(io.Discard, r.in, n)
	r.at += copied
	if errors.Is(err, io.EOF) {
		// A missing pad byte at the very end hurts nobody, but nothing follows it.
		return bad("it ends after %d bytes, in the middle", r.at)
	}
	return err
}

func (r *reader) ds64(size int64) error {
	if !r.rf64 || size < 28 {
		return bad("a 64-bit size chunk of %d bytes where none can be", size)
	}
	b := make([]byte, 28)
	if err := r.full(b); err != nil {
		return err
	}
	n := binary.LittleEndian.Uint64(b[8:])
	if n > math.MaxInt64/2 {
		return bad("its samples are said to take %d bytes", n)
	}
	r.data64 = int64(n)
	return r.skip(size - 28 + size&1)
}

func (r *reader) readFormat(size int64) error {
	if r.known {
		return bad("there are two of them")
	}
	if size < 16 || size > 1<<16 {
		return bad("it has %d bytes", size)
	}
	b := make([]byte, size)
	if err := r.full(b); err != nil {
		return err
	}
	f, err := parseFormat(b)
	if err != nil {
		return err
	}
	r.format, r.known = f, true
	return r.skip(size & 1)
}

func parseFormat(b []byte) (Format, error) {
	le := binary.LittleEndian
	tag := le.Uint16(b)
	f := Format{Channels: int(le.Uint16(b[2:])), SampleRate: int(le.Uint32(b[4:])), Bits: int(le.Uint16(b[14:]))}
	if tag == tagExtensible {
		if len(b) < 40 {
			return f, bad("extensible, but %d bytes long instead of 40", len(b))
		}
		tag = le.Uint16(b[24:])
		if string(b[26:40]) != "\x00\x00\x00\x00\x10\x00\x80\x00\x00\xaa\x00\x38\x9b\x71" {
			return f, bad("samples of a private kind")
		}
		if v := int(le.Uint16(b[18:])); v == 0 || v > f.Bits {
			return f, bad("%d valid bits in %d", v, f.Bits)
		}
	}
	switch tag {
	case tagPCM:
	case tagFloat:
		f.Float = true
	default:
		return f, bad("samples are compressed (tag 0x%04x); write it as PCM or float", tag)
	}
	if err := f.Valid(); err != nil {
		return f, err
	}
	if align := int(le.Uint16(b[12:])); align != f.frame() {
		return f, bad("frames of %d bytes where %d channels of %d bits take %d", align, f.Channels, f.Bits, f.frame())
	}
	return f, nil
}

// data reads the samples, in blocks, so that memory follows what really comes.
func (r *reader) data(size int64) (*File, error) {
	if !r.known {
		return nil, bad("samples come before their format")
	}
	if r.rf64 && size == unknownSize {
		size = r.data64
	}
	frame := int64(r.format.frame())
	if size%frame != 0 {
		return nil, bad("%d bytes of samples are no whole number of frames of %d bytes", size, frame)
	}
	out := &File{Format: r.format, Samples: make([][]float32, r.format.Channels)}
	block := make([]byte, frame*4096)
	for left := size; left > 0; {
		n := min(left, int64(len(block)))
		got, err := io.ReadFull(r.in, block[:n])
		r.at += int64(got)
		if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
			have := size - left + int64(got)
			return nil, bad("cut short: %d of %d frames are there", have/frame, size/frame)
		}
		if err != nil {
			return nil, err
		}
		out.append(block[:n])
		left -= n
	}
	return out, nil
}

// append decodes whole frames.
func (f *File) append(b []byte) {
	width := f.Bits / 8
	for len(b) > 0 {
		for c := range f.Samples {
			f.Samples[c] = append(f.Samples[c], f.sample(b))
			b = b[width:]
		}
	}
}

func (f *File) sample(b []byte) float32 {
	switch {
	case f.Float:
		return math.Float32frombits(binary.LittleEndian.Uint32(b))
	case f.Bits == 16:
		return float32(int16(binary.LittleEndian.Uint16(b))) / (1 << 15)
	case f.Bits == 24:
		return float32(int32(uint32(b[0])<<8|uint32(b[1])<<16|uint32(b[2])<<24)>>8) / (1 << 23)
	}
	return float32(float64(int32(binary.LittleEndian.Uint32(b))) / (1 << 31))
}
