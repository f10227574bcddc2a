package wav

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"strings"
	"testing"
)

// layout is a WAV file taken apart by the documents, not by the package: chunk
// sizes as written, bodies as they are.
type layout struct {
	kind   string
	size   uint32
	order  []string
	sizes  map[string]uint32
	bodies map[string][]byte
}

// takeApart follows IBM and Microsoft (1991) and EBU Tech 3306: chunks begin at
// even bytes, and a size of −1 is to be found in ds64.
func takeApart(t *testing.T, b []byte) layout {
	t.Helper()
	le := binary.LittleEndian
	l := layout{kind: string(b[:4]), size: le.Uint32(b[4:]), sizes: map[string]uint32{}, bodies: map[string][]byte{}}
	if string(b[8:12]) != "WAVE" {
		t.Fatalf("kind %q", b[8:12])
	}
	for at := 12; at < len(b); {
		id, size := string(b[at:at+4]), le.Uint32(b[at+4:])
		n := int(size)
		if size == 0xffffffff {
			n = int(le.Uint64(l.bodies["ds64"][8:]))
		}
		at += 8
		l.order = append(l.order, id)
		l.sizes[id], l.bodies[id] = size, b[at:at+n]
		if n%2 == 1 && b[at+n] != 0 {
			t.Errorf("the pad byte of %s is %d", id, b[at+n])
		}
		at += n + n%2
	}
	return l
}

func TestLayoutOfRIFF(t *testing.T) {
	for _, f := range formats() {
		b := encoded(t, fileOf(f, noise(5, f.Channels, f.significant())))
		l := takeApart(t, b)
		if l.kind != "RIFF" || int(l.size) != len(b)-8 {
			t.Errorf("%v: %s of %d in %d bytes", f, l.kind, l.size, len(b))
		}
		checkFormatBody(t, f, l.bodies["fmt "])
		checkFact(t, f, l, 5)
		if got := len(l.bodies["data"]); got != 5*f.Channels*f.Bits/8 {
			t.Errorf("%v: %d bytes of data", f, got)
		}
	}
}

// checkFact: every format but plain PCM has a fact chunk with the frames.
func checkFact(t *testing.T, f Format, l layout, frames uint32) {
	t.Helper()
	want := "fmt data"
	if binary.LittleEndian.Uint16(l.bodies["fmt "]) != 1 {
		want = "fmt fact data"
		if got := binary.LittleEndian.Uint32(l.bodies["fact"]); got != frames {
			t.Errorf("%v: the fact chunk says %d frames", f, got)
		}
	}
	got := strings.Join(strings.Fields(strings.Join(l.order, " ")), " ")
	if strings.TrimPrefix(got, "ds64 ") != want {
		t.Errorf("%v: chunks %s, want %s", f, got, want)
	}
}

// checkFormatBody compares with WAVEFORMATEX and WAVEFORMATEXTENSIBLE, written
// out here; the GUIDs are KSDATAFORMAT_SUBTYPE_PCM and _IEEE_FLOAT of the
// document of 2001.
func checkFormatBody(t *testing.T, f Format, got []byte) {
	t.Helper()
	frame := f.Channels * f.Bits / 8
	fields := func(tag int) []byte {
		b := bytesOf([]uint16{uint16(tag), uint16(f.Channels)})
		b = append(b, bytesOf([]uint32{uint32(f.SampleRate), uint32(f.SampleRate * frame)})...)
		return append(b, bytesOf([]uint16{uint16(frame), uint16(f.Bits)})...)
	}
	pcm := []byte{1, 0, 0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xaa, 0, 0x38, 0x9b, 0x71}
	float := append([]byte{3}, pcm[1:]...)
	guid := pcm
	if f.Float {
		guid = float
	}
	var want []byte
	switch {
	case f.Channels > 2 || f.Bits > 16 && !f.Float:
		want = append(append(fields(0xfffe), bytesOf([]uint16{22, uint16(f.Bits), 0, 0})...), guid...)
	case f.Float:
		want = append(fields(3), 0, 0)
	default:
		want = fields(1)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%v: format chunk\n%x, want\n%x", f, got, want)
	}
}

func TestLayoutOfRF64(t *testing.T) {
	le := binary.LittleEndian
	for _, f := range formats() {
		x := fileOf(f, noise(5, f.Channels, f.significant()))
		var long bytes.Buffer
		if err := encode(&long, x, 40); err != nil {
			t.Fatal(err)
		}
		l := takeApart(t, long.Bytes())
		sizes := l.bodies["ds64"]
		if l.kind != "RF64" || l.size != 0xffffffff || l.order[0] != "ds64" || l.sizes["data"] != 0xffffffff || len(sizes) != 28 {
			t.Errorf("%v: %+v", f, l)
			continue
		}
		data := uint64(5 * f.Channels * f.Bits / 8)
		if whole, d, n, table := le.Uint64(sizes), le.Uint64(sizes[8:]), le.Uint64(sizes[16:]), le.Uint32(sizes[24:]); whole != uint64(long.Len()-8) || d != data || n != 5 || table != 0 {
			t.Errorf("%v: ds64 says %d, %d, %d, %d of %d bytes", f, whole, d, n, table, long.Len())
		}
		checkFormatBody(t, f, l.bodies["fmt "])
		checkFact(t, f, l, 5)
		// The samples are those of the short form, and come back from both.
		if short := takeApart(t, encoded(t, x)); !bytes.Equal(short.bodies["data"], l.bodies["data"]) {
			t.Errorf("%v: samples differ from those of the short form", f)
		}
		got, err := Decode(&long)
		if err != nil {
			t.Fatal(err)
		}
		if err := compare(got, noise(5, f.Channels, f.significant()), 0); err != nil || got.Format != f {
			t.Errorf("%v: %v", f, err)
		}
	}
}

// TestThreshold: RIFF as long as its 32 bits can say the size.
func TestThreshold(t *testing.T) {
	f := &File{Format{48000, 1, 16, false}, [][]float32{make([]float32, 10)}}
	for longest, want := range map[int64]string{56: "RIFF", 55: "RF64"} { // 12 + 24 + 8 + 20 = 64 bytes
		var b bytes.Buffer
		if err := encode(&b, f, longest); err != nil {
			t.Fatal(err)
		}
		if got := b.String()[:4]; got != want {
			t.Errorf("longest %d: %s, want %s", longest, got, want)
		}
	}
}

// TestHeaderOfLongFile looks at the header only of a file beyond 4 GB: one
// channel's worth of memory, used eight times.
func TestHeaderOfLongFile(t *testing.T) {
	if testing.Short() {
		t.Skip("takes 600 MB of address space")
	}
	x := make([]float32, 1<<27+1) // never touched: no memory behind it
	f := &File{Format{48000, 8, 32, true}, [][]float32{x, x, x, x, x, x, x, x}}
	full := errors.New("enough")
	w := &limited{err: full}
	if err := Encode(w, f); !errors.Is(err, full) {
		t.Fatal(err)
	}
	const data = (1<<27 + 1) * 32
	got := w.b[:60]
	want := append([]byte("RF64\xff\xff\xff\xffWAVEds64\x1c\x00\x00\x00"), bytesOf([]uint64{data + 12 + 36 + 48 + 12 + 8 - 8, data, 1<<27 + 1})...)
	want = append(want, "\x00\x00\x00\x00fmt \x28\x00\x00\x00\xfe\xff\x08\x00"...)
	if !bytes.Equal(got, want) {
		t.Errorf("header\n%x, want\n%x", got, want)
	}
}

// limited takes the first block and then fails.
type limited struct {
	b   []byte
	err error
}

func (w *limited) Write(b []byte) (int, error) {
	w.b = append(w.b, b...)
	return 0, w.err
}

// TestRounding: to nearest, ends limited; the integers are written by hand.
func TestRounding(t *testing.T) {
	inf := float32(math.Inf(1))
	x := []float32{0, 1, -1, 2, -2, inf, -inf, 1.6 / 32768, -1.6 / 32768, 1.4 / 32768, 0.5, 0.99999}
	want16 := []int16{0, 32767, -32768, 32767, -32768, 32767, -32768, 2, -2, 1, 16384, 32767}
	got := takeApart(t, encoded(t, &File{Format{48000, 1, 16, false}, [][]float32{x}})).bodies["data"]
	if !bytes.Equal(got, bytesOf(want16)) {
		t.Errorf("%x, want %x", got, bytesOf(want16))
	}
	got = takeApart(t, encoded(t, &File{Format{48000, 1, 24, false}, [][]float32{{1, -1, 0.5, -1.0 / (1 << 23)}}})).bodies["data"]
	if want := "\xff\xff\x7f\x00\x00\x80\x00\x00\x40\xff\xff\xff"; string(got) != want {
		t.Errorf("%x, want %x", got, want)
	}
	got = takeApart(t, encoded(t, &File{Format{48000, 1, 32, false}, [][]float32{{1, -1, 0.5, -1.0 / (1 << 31)}}})).bodies["data"]
	if want := "\xff\xff\xff\x7f\x00\x00\x00\x80\x00\x00\x00\x40\xff\xff\xff\xff"; string(got) != want {
		t.Errorf("%x, want %x", got, want)
	}
}

func TestEncodeRefuses(t *testing.T) {
	nan := float32(math.NaN())
	one := [][]float32{{0}}
	for want, f := range map[string]*File{
		"a sample rate of 0 Hz":                 {Format{0, 1, 16, false}, one},
		"0 channels":                            {Format{48000, 0, 16, false}, nil},
		"9 channels":                            {Format{48000, 9, 16, false}, make([][]float32, 9)},
		"samples of 8 bits":                     {Format{48000, 1, 8, false}, one},
		"float samples of 16 bits":              {Format{48000, 1, 16, true}, one},
		"1 channels of samples":                 {Format{48000, 2, 16, false}, one},
		"channels differ in length":             {Format{48000, 2, 16, false}, [][]float32{{0}, {0, 0}}},
		"sample 1 of channel 2 is not a number": {Format{48000, 2, 16, false}, [][]float32{{0, 0}, {0, nan}}},
	} {
		var b bytes.Buffer
		if err := Encode(&b, f); err == nil || !strings.Contains(err.Error(), want) || b.Len() > 0 {
			t.Errorf("%d bytes and error %v, want %q", b.Len(), err, want)
		}
	}
}
