package wav

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"testing/iotest"
)

func wantError(t *testing.T, err error, text string) {
	t.Helper()
	if err == nil || !errors.Is(err, ErrFormat) || !strings.Contains(err.Error(), text) {
		t.Errorf("error is %q, want an ErrFormat with %q", err, text)
	}
}

// put writes little-endian numbers over a file.
func put(b []byte, at int, x any) []byte {
	out := bytes.Clone(b)
	copy(out[at:], bytesOf(x))
	return out
}

func chunkOf(id string, body string) string {
	b := id + string(bytesOf(uint32(len(body)))) + body
	if len(body)%2 == 1 {
		b += "\x00"
	}
	return b
}

func riff(chunks ...string) []byte {
	body := "WAVE" + strings.Join(chunks, "")
	return []byte("RIFF" + string(bytesOf(uint32(len(body)))) + body)
}

// plain is a format chunk by the RIFF document of 1991.
func plain(tag, channels uint16, rate uint32, bits uint16) string {
	frame := channels * ((bits + 7) / 8)
	return chunkOf("fmt ", string(bytesOf([]uint16{tag, channels}))+string(bytesOf([]uint32{rate, rate * uint32(frame)}))+
		string(bytesOf([]uint16{frame, bits})))
}

func small() []byte {
	return riff(chunkOf("JUNK", "odd"), plain(1, 2, 48000, 16), chunkOf("data", "\x00\x80\xff\x7f\x01\x00\xff\xff"), chunkOf("LIST", "after"))
}

func TestSmall(t *testing.T) {
	f, err := Decode(iotest.OneByteReader(bytes.NewReader(small())))
	if err != nil {
		t.Fatal(err)
	}
	if want := (Format{SampleRate: 48000, Channels: 2, Bits: 16}); f.Format != want {
		t.Errorf("format %+v, want %+v", f.Format, want)
	}
	if err := compare(f, []int32{-1 << 31, 0x7fff << 16, 1 << 16, -1 << 16}, 0); err != nil {
		t.Error(err)
	}
}

// TestEveryTruncation cuts files of every layout at every byte.
func TestEveryTruncation(t *testing.T) {
	files := [][]byte{small()}
	for _, f := range formats() {
		x := fileOf(f, noise(3, f.Channels, f.significant()))
		var long bytes.Buffer
		if err := encode(&long, x, 0); err != nil {
			t.Fatal(err)
		}
		files = append(files, encoded(t, x), long.Bytes())
	}
	for i, b := range files {
		if _, err := Decode(bytes.NewReader(b)); err != nil {
			t.Fatalf("file %d: %v", i, err)
		}
		for n := range b {
			if f, err := Decode(bytes.NewReader(b[:n])); f != nil || !errors.Is(err, ErrFormat) {
				t.Fatalf("file %d cut to %d of %d bytes: %v, %v", i, n, len(b), f, err)
			}
		}
		_, err := Decode(bytes.NewReader(append(bytes.Clone(b), 0)))
		wantError(t, err, "it goes on after")
	}
}

// TestLies spoils small (RIFF 0, JUNK 12, fmt 24, data 48, LIST 64; 78 bytes).
func TestLies(t *testing.T) {
	le16 := func(at int, v uint16) []byte { return put(small(), at, v) }
	le32 := func(at int, v uint32) []byte { return put(small(), at, v) }
	for _, c := range []struct {
		b    []byte
		want string
	}{
		{nil, "it ends after 0 bytes"},
		{[]byte("a text that is no WAV file"), `it begins with "a te" instead of RIFF or RF64`},
		{[]byte("RIFX\x00\x00\x00\x00WAVE"), "big-endian"},
		{[]byte("RIFF\x04\x00\x00\x00AVI "), `its kind is "AVI "`},
		{le32(4, 0), "never finished"},
		{le32(4, math.MaxUint32), "never finished"},
		{le32(4, 71), "cut short: it ends after 78 bytes, its header says 79"},
		{le32(4, 3), "it has no samples"},
		{le32(4, 68), `chunk "LIST" at byte 64: it says 5 bytes, but of the 76 that the header gives the file 4 are left`},
		{le32(4, 56), "it goes on after the 64 bytes"},
		{le32(4, 58), "byte 64: 2 bytes are left, too few for a chunk"},
		{le32(16, 1<<31), `chunk "JUNK" at byte 12: it says 2147483648 bytes, but of the 78 that the header gives the file 58 are left`},
		{le32(52, 12), `chunk "\x05\x00\x00\x00" at byte 68: it says 1702127201 bytes`},
		{le32(52, 10), `chunk "data" at byte 48: 10 bytes are no whole number of frames of 4 bytes`},
		{le32(52, 0xfffffff0), `chunk "data" at byte 48: it says 4294967280 bytes`},
		{le32(52, 24), `chunk "data" at byte 48: it says 24 bytes, but of the 78 that the header gives the file 22 are left`},
		{le16(32, 2), "samples of kind 0x0002, which is neither PCM nor float"},
		{le16(34, 0), "0 channels, not 1 to 8"},
		{le16(34, 9), "9 channels, not 1 to 8"},
		{le32(36, 0), "a sample rate of 0 Hz"},
		{le32(36, math.MaxUint32), "a sample rate of 4294967295 Hz"},
		{le16(44, 6), "frames of 6 bytes, where 2 × 16 bits take 4"},
		{le16(46, 8), "samples of 8 bits, not 16, 24 or 32"},
		{le16(46, 0), "samples of 0 bits"},
		{le16(32, 3), "float samples of 16 bits, not 32"},
		{le32(28, 15), "a format of 15 bytes"},
		{riff(chunkOf("fmt ", strings.Repeat("x", 1<<17))), "a format of 131072 bytes"},
		{riff(chunkOf("data", "1234")), "samples come before their format"},
		{riff(plain(1, 1, 48000, 16)), "the data chunk is missing"},
		{riff(plain(1, 1, 48000, 16), plain(1, 1, 48000, 16)), "a second format"},
		{riff(plain(1, 1, 48000, 16), chunkOf("data", "12"), chunkOf("data", "12")), "a second time"},
		{riff(plain(3, 1, 48000, 64), chunkOf("data", "12345678")), "float samples of 64 bits, not 32"},
		{riff(plain(0xFFFE, 1, 48000, 16), chunkOf("data", "12")), "an extensible format of 16 bytes instead of 40"},
	} {
		f, err := Decode(bytes.NewReader(c.b))
		if f != nil {
			t.Errorf("%q: a file and an error", c.want)
		}
		wantError(t, err, c.want)
	}
}

func TestLiesOfExtensible(t *testing.T) {
	b := encoded(t, fileOf(Format{48000, 1, 24, false}, noise(4, 1, 24)))
	for want, spoilt := range map[string][]byte{
		"0 valid bits in 24":       put(b, 38, uint16(0)),
		"25 valid bits in 24":      put(b, 38, uint16(25)),
		"an extensible format":     put(b, 36, uint16(0)),
		"a private kind":           put(b, 59, uint8(0)),
		"samples of kind 0x0055":   put(b, 44, uint16(0x55)),
		"float samples of 24 bits": put(b, 44, uint16(3)),
	} {
		_, err := Decode(bytes.NewReader(spoilt))
		wantError(t, err, want)
	}
	// 20 bits in 24 stand at the upper end: the same scale.
	f, err := Decode(bytes.NewReader(put(b, 38, uint16(20))))
	if err != nil {
		t.Fatal(err)
	}
	if err := compare(f, noise(4, 1, 24), 0); err != nil {
		t.Error(err)
	}
}

func TestLiesOfRF64(t *testing.T) {
	var long bytes.Buffer
	if err := encode(&long, fileOf(Format{48000, 1, 16, false}, noise(4, 1, 16)), 0); err != nil {
		t.Fatal(err)
	}
	b := long.Bytes() // ds64 12, fmt 48, data 72, 88 bytes
	for _, c := range []struct {
		b    []byte
		want string
	}{
		{put(b, 12, []byte("JUNK")), "does not begin with its sizes (ds64)"},
		{put(b, 16, uint32(27)), "does not begin with its sizes (ds64)"},
		{put(b, 16, uint32(0xfffffff0)), "its ds64 chunk says that it has 4294967280 bytes itself"},
		{put(b, 20, uint64(math.MaxUint64)), "bytes of samples in 18446744073709551615 bytes"},
		{put(b, 20, uint64(math.MaxInt64)), "bytes of samples in 9223372036854775807 bytes"},
		{put(b, 20, uint64(81)), "cut short: it ends after 88 bytes, its header says 89"},
		{put(b, 20, uint64(79)), `chunk "data" at byte 72: it says 8 bytes, but of the 87`},
		{put(b, 28, uint64(1)<<40), "its ds64 chunk says 1099511627776 bytes of samples in 80 bytes"},
		{put(b, 28, uint64(6)), "byte 86: 2 bytes are left"},
		{put(b, 52, uint32(math.MaxUint32)), `chunk "fmt " at byte 48: longer than 4 GB`},
		{b[:40], "it ends after 40 bytes, before its header does"},
	} {
		_, err := Decode(bytes.NewReader(c.b))
		wantError(t, err, c.want)
	}
	// EBU Tech 3306: a 32-bit size that is not −1 counts.
	if _, err := Decode(bytes.NewReader(put(put(b, 4, uint32(80)), 20, uint64(1)<<40))); err != nil {
		t.Error(err)
	}
}

// TestOddEnd: where the header does not count the last pad byte, it may be there
// or not.
func TestOddEnd(t *testing.T) {
	b := riff(plain(1, 1, 48000, 24), chunkOf("data", "\x00\x00\x80"))
	b = put(b, 4, binary.LittleEndian.Uint32(b[4:])-1)
	for _, n := range []int{len(b), len(b) - 1} {
		f, err := Decode(bytes.NewReader(b[:n]))
		if err != nil || len(f.Samples[0]) != 1 || f.Samples[0][0] != -1 {
			t.Errorf("%d bytes: %v, %v", n, f, err)
		}
	}
	for _, more := range [][]byte{{0}, {1}} {
		_, err := Decode(bytes.NewReader(append(bytes.Clone(b), more...)))
		wantError(t, err, "it goes on after the 47 bytes")
	}
	_, err := Decode(bytes.NewReader(put(b, len(b)-1, uint8(1))))
	wantError(t, err, "it goes on after the 47 bytes")
}

func TestNoSamples(t *testing.T) {
	f, err := Decode(bytes.NewReader(riff(plain(1, 2, 48000, 16), chunkOf("data", ""))))
	if err != nil || len(f.Samples) != 2 || len(f.Samples[1]) != 0 {
		t.Errorf("%v, %v", f, err)
	}
}

// TestClaimsTakeNoMemory gives headers that promise 4 GB and more, in some
// hundred bytes.
func TestClaimsTakeNoMemory(t *testing.T) {
	const huge = 0xfffffff0
	wide := put(riff(plain(3, 8, 48000, 32), chunkOf("data", strings.Repeat("x", 64))), 4, uint32(huge))
	var long bytes.Buffer
	if err := encode(&long, fileOf(Format{48000, 8, 32, true}, noise(2, 8, 24)), 0); err != nil {
		t.Fatal(err)
	}
	for name, b := range map[string][]byte{
		"data":   put(wide, 40, uint32(huge-44)),
		"format": put(wide, 16, uint32(huge-44)),
		"junk":   put(put(wide, 12, []byte("JUNK")), 16, uint32(huge-44)),
		"ds64":   put(put(long.Bytes(), 20, uint64(1)<<60), 28, uint64(1)<<59),
		"table":  put(put(long.Bytes(), 20, uint64(1)<<60), 16, uint32(huge)),
	} {
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		_, err := Decode(bytes.NewReader(b))
		runtime.ReadMemStats(&after)
		wantError(t, err, "")
		if used := after.TotalAlloc - before.TotalAlloc; used > 1<<20 {
			t.Errorf("%s: %d bytes of memory for %d bytes of file", name, used, len(b))
		}
	}
}

// TestDiskErrors are no format errors.
func TestDiskErrors(t *testing.T) {
	broken := errors.New("the disk is broken")
	for n := range len(small()) + 1 {
		in := io.MultiReader(bytes.NewReader(small()[:n]), iotest.ErrReader(broken))
		if _, err := Decode(in); !errors.Is(err, broken) || errors.Is(err, ErrFormat) {
			t.Fatalf("after %d bytes: %v", n, err)
		}
	}
}

func TestReadFileNamesTheFile(t *testing.T) {
	dir := t.TempDir()
	if _, err := ReadFile(filepath.Join(dir, "none.wav")); !errors.Is(err, fs.ErrNotExist) || !strings.Contains(err.Error(), "none.wav") {
		t.Error(err)
	}
	cut := filepath.Join(dir, "cut.wav")
	if err := os.WriteFile(cut, small()[:50], 0o644); err != nil {
		t.Fatal(err)
	}
	_, err := ReadFile(cut)
	wantError(t, err, "cut.wav: cut short: it ends after 50 bytes, its header says 78")
	if _, err := ReadFile(dir); err == nil || !strings.Contains(err.Error(), dir) {
		t.Error(err)
	}
}
