package wav

import (
	"encoding/binary"
	"math"
)

// The tags of the format chunk.
const (
	tagPCM        = 1
	tagFloat      = 3
	tagExtensible = 0xFFFE
)

// guidTail is what follows the tag in the extensible format's GUID of a kind of
// samples: KSDATAFORMAT_SUBTYPE_PCM and _IEEE_FLOAT differ in the tag only.
const guidTail = "\x00\x00\x00\x00\x10\x00\x80\x00\x00\xaa\x00\x38\x9b\x71"

// readFormat reads the format chunk. Nobody's is longer than 64 KB.
func (r *reader) readFormat(size int64) error {
	switch {
	case r.format != nil:
		return bad("a second format")
	case size < 16 || size > 1<<16:
		return bad("a format of %d bytes", size)
	}
	b := make([]byte, size)
	if err := r.full(b); err != nil {
		return err
	}
	f, err := parseFormat(b)
	if err != nil {
		return err
	}
	r.format = &f
	return nil
}

func parseFormat(b []byte) (Format, error) {
	le := binary.LittleEndian
	f := Format{Channels: int(le.Uint16(b[2:])), SampleRate: int(le.Uint32(b[4:])), Bits: int(le.Uint16(b[14:]))}
	tag, err := sampleTag(b, f.Bits)
	if err != nil {
		return f, err
	}
	if tag != tagPCM && tag != tagFloat {
		return f, bad("samples of kind 0x%04x, which is neither PCM nor float", tag)
	}
	f.Float = tag == tagFloat
	if err := f.Validate(); err != nil {
		return f, formatError(err.Error())
	}
	if align := int(le.Uint16(b[12:])); align != f.frame() {
		return f, bad("frames of %d bytes, where %d × %d bits take %d", align, f.Channels, f.Bits, f.frame())
	}
	return f, nil
}

// sampleTag is the kind of the samples, also where the extensible format hides
// it. Fewer valid bits than the sample has are at its upper end, so that the
// scale is that of the sample.
func sampleTag(b []byte, bits int) (uint16, error) {
	le := binary.LittleEndian
	tag := le.Uint16(b)
	if tag != tagExtensible {
		return tag, nil
	}
	if len(b) < 40 || le.Uint16(b[16:]) < 22 {
		return 0, bad("an extensible format of %d bytes instead of 40", len(b))
	}
	if valid := int(le.Uint16(b[18:])); valid == 0 || valid > bits {
		return 0, bad("%d valid bits in %d", valid, bits)
	}
	if string(b[26:40]) != guidTail {
		return 0, bad("samples of a private kind")
	}
	return le.Uint16(b[24:]), nil
}

// extensible says whether the 2001 document asks for the extensible format: more
// than two channels, or PCM of more than 16 bits.
func (f Format) extensible() bool { return f.Channels > 2 || !f.Float && f.Bits > 16 }

// chunk is the format chunk. Channels have no places around a listener.
func (f Format) chunk() []byte {
	le := binary.LittleEndian
	kind := uint16(tagPCM)
	if f.Float {
		kind = tagFloat
	}
	tag, size := kind, uint32(16)
	switch {
	case f.extensible():
		tag, size = tagExtensible, 40
	case f.Float:
		size = 18
	}
	b := le.AppendUint32([]byte("fmt "), size)
	b = le.AppendUint16(b, tag)
	b = le.AppendUint16(b, uint16(f.Channels))
	b = le.AppendUint32(b, uint32(f.SampleRate))
	b = le.AppendUint32(b, uint32(min(int64(f.SampleRate)*int64(f.frame()), math.MaxUint32)))
	b = le.AppendUint16(b, uint16(f.frame()))
	b = le.AppendUint16(b, uint16(f.Bits))
	switch {
	case f.extensible():
		b = le.AppendUint16(b, 22)
		b = le.AppendUint16(b, uint16(f.Bits))
		b = le.AppendUint32(b, 0)
		b = le.AppendUint16(b, kind)
		b = append(b, guidTail...)
	case f.Float:
		b = le.AppendUint16(b, 0)
	}
	return b
}
