package wav

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
)

// unknownSize stands for a 32-bit size whose true value is in the ds64 chunk.
const unknownSize = math.MaxUint32

// reader walks through the chunks. It trusts no size: what is not there is an
// error, and memory grows with what has really been read.
type reader struct {
	in     *bufio.Reader
	at     int64 // bytes read
	end    int64 // bytes of the whole file, as its header has it
	rf64   bool
	data64 int64 // bytes of samples, as the ds64 chunk has it
	format *Format
	file   *File // once the samples have been read
}

// Decode reads a WAV file, to the end of the input. Errors that are ErrFormat
// say what is wrong and at which byte: a file that ends before its header says,
// goes on behind it, contradicts itself, or is of a kind that cannot be read.
func Decode(in io.Reader) (*File, error) {
	r := &reader{in: bufio.NewReaderSize(in, 1<<16)}
	if err := r.header(); err != nil {
		return nil, err
	}
	for r.at < r.end {
		if err := r.chunk(); err != nil {
			return nil, err
		}
	}
	if r.file == nil {
		return nil, bad("it has no samples: the data chunk is missing")
	}
	if err := r.finish(); err != nil {
		return nil, err
	}
	return r.file, nil
}

// finish wants nothing to follow. Some programs write the last pad byte without
// counting it.
func (r *reader) finish() error {
	b, err := r.in.ReadByte()
	if err == nil && b == 0 && r.end&1 == 1 {
		_, err = r.in.ReadByte()
	}
	switch {
	case err == nil:
		return bad("it goes on after the %d bytes that its header says it has", r.end)
	case errors.Is(err, io.EOF):
		return nil
	}
	return err
}

// full reads all of b.
func (r *reader) full(b []byte) error {
	n, err := io.ReadFull(r.in, b)
	r.at += int64(n)
	return r.cut(err)
}

// skip reads n bytes for nothing.
func (r *reader) skip(n int64) error {
	copied, err := io.CopyN(io.Discard, r.in, n)
	r.at += copied
	return r.cut(err)
}

// cut turns the end of the input, where more was promised, into words.
func (r *reader) cut(err error) error {
	if !errors.Is(err, io.EOF) && !errors.Is(err, io.ErrUnexpectedEOF) {
		return err
	}
	if r.end == 0 {
		return bad("it ends after %d bytes, before its header does", r.at)
	}
	return bad("cut short: it ends after %d bytes, its header says %d", r.at, r.end)
}

// header reads what stands before the chunks; of RF64 the sizes belong to it.
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
		return bad("its bytes are in big-endian order (RIFX); write it as RIFF")
	default:
		return bad("it is not a WAV file: it begins with %q instead of RIFF or RF64", b[:4])
	}
	if string(b[8:]) != "WAVE" {
		return bad("it is not a WAV file: its kind is %q instead of WAVE", b[8:])
	}
	size := binary.LittleEndian.Uint32(b[4:])
	if r.rf64 {
		return r.ds64(size)
	}
	if size == 0 || size == unknownSize {
		return bad("its header was never finished: it says %d bytes; write it to a file and not through a pipe", size)
	}
	r.end = 8 + int64(size)
	return nil
}

// ds64 reads the chunk that RF64 begins with: sizes of 64 bits of the whole, of
// the samples and in frames, then a table for other chunks that need it.
func (r *reader) ds64(total uint32) error {
	b := make([]byte, 8+28)
	if err := r.full(b); err != nil {
		return err
	}
	le := binary.LittleEndian
	size := int64(le.Uint32(b[4:]))
	if string(b[:4]) != "ds64" || size < 28 {
		return bad("it is RF64 but does not begin with its sizes (ds64)")
	}
	whole, data := le.Uint64(b[8:]), le.Uint64(b[16:])
	if total != unknownSize {
		whole = uint64(total)
	}
	if whole > math.MaxInt64-8 || data > whole {
		return bad("its ds64 chunk says %d bytes of samples in %d bytes", data, whole)
	}
	r.end, r.data64 = 8+int64(whole), int64(data)
	if size-28 > r.end-r.at {
		return bad("its ds64 chunk says that it has %d bytes itself", size)
	}
	return r.skip(size - 28 + size&1)
}

// chunk reads one chunk with its padding.
func (r *reader) chunk() error {
	start := r.at
	if left := r.end - start; left < 8 {
		if err := r.skip(left); err != nil {
			return err
		}
		return bad("byte %d: %d bytes are left, too few for a chunk", start, left)
	}
	b := make([]byte, 8)
	if err := r.full(b); err != nil {
		return err
	}
	id := string(b[:4])
	err := r.chunkBody(id, int64(binary.LittleEndian.Uint32(b[4:])))
	if err != nil {
		return fmt.Errorf("chunk %q at byte %d: %w", id, start, err)
	}
	return nil
}

func (r *reader) chunkBody(id string, size int64) error {
	if r.rf64 && size == unknownSize {
		if id != "data" {
			return bad("longer than 4 GB, which only samples may be here")
		}
		size = r.data64
	}
	if left := r.end - r.at; size > left {
		return bad("it says %d bytes, but of the %d that the header gives the file %d are left", size, r.end, left)
	}
	var err error
	switch id {
	case "fmt ":
		err = r.readFormat(size)
	case "data":
		err = r.data(size)
	default:
		err = r.skip(size)
	}
	// Some programs leave out the last pad byte, or do not count it.
	if err == nil && size&1 == 1 && r.at < r.end {
		err = r.skip(1)
	}
	return err
}

// data reads the samples, in blocks.
func (r *reader) data(size int64) error {
	switch {
	case r.format == nil:
		return bad("samples come before their format")
	case r.file != nil:
		return bad("samples for a second time")
	}
	frame := int64(r.format.frame())
	if size%frame != 0 {
		return bad("%d bytes are no whole number of frames of %d bytes", size, frame)
	}
	f := &File{Format: *r.format, Samples: make([][]float32, r.format.Channels)}
	block := make([]byte, frame*4096)
	for left := size; left > 0; {
		n := min(left, int64(len(block)))
		if err := r.full(block[:n]); err != nil {
			return err
		}
		f.append(block[:n])
		left -= n
	}
	r.file = f
	return nil
}

// append decodes whole frames.
func (f *File) append(b []byte) {
	width, sample := f.Bits/8, f.decoder()
	for len(b) > 0 {
		for c := range f.Samples {
			f.Samples[c] = append(f.Samples[c], sample(b))
			b = b[width:]
		}
	}
}

// decoder gives what turns the first bytes of a slice into a sample.
func (f Format) decoder() func([]byte) float32 {
	le := binary.LittleEndian
	switch {
	case f.Float:
		return func(b []byte) float32 { return math.Float32frombits(le.Uint32(b)) }
	case f.Bits == 16:
		return func(b []byte) float32 { return float32(int16(le.Uint16(b))) / (1 << 15) }
	case f.Bits == 24:
		return func(b []byte) float32 {
			return float32(int32(uint32(b[0])<<8|uint32(b[1])<<16|uint32(b[2])<<24)>>8) / (1 << 23)
		}
	}
	return func(b []byte) float32 { return float32(int32(le.Uint32(b))) / (1 << 31) }
}
