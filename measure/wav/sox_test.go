package wav

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// asSox is a format in the options of sox.
func asSox(f Format) []string {
	encoding := "signed-integer"
	if f.Float {
		encoding = "floating-point"
	}
	return []string{"-r", strconv.Itoa(f.SampleRate), "-c", strconv.Itoa(f.Channels), "-b", strconv.Itoa(f.Bits), "-e", encoding}
}

// bySox has sox write samples as a WAV file; kind wavpcm is the plain format.
func bySox(t testing.TB, f Format, kind string, x []int32) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "sox.wav")
	args := []string{"-t", "s32", "-r", strconv.Itoa(f.SampleRate), "-c", strconv.Itoa(f.Channels), "-", "-t", kind}
	sox(t, bytesOf(x), append(append(args, asSox(f)...), path)...)
	return path
}

// TestFilesOfSox decodes files that sox made and compares them with what sox
// itself says is in them, at its full 32 bits.
func TestFilesOfSox(t *testing.T) {
	needSox(t)
	for _, f := range formats() {
		for _, kind := range []string{"wav", "wavpcm"} {
			if kind == "wavpcm" && f.Float {
				continue
			}
			t.Run(fmt.Sprint(kind, f), func(t *testing.T) {
				bits := f.Bits
				if f.Float {
					bits = 24 // sox would clip at the upper end
				}
				path := bySox(t, f, kind, noise(5001, f.Channels, bits))
				checkTag(t, path, kind, f)
				got, err := ReadFile(path)
				if err != nil {
					t.Fatal(err)
				}
				if got.Format != f {
					t.Errorf("format %+v, want %+v", got.Format, f)
				}
				slack := 0.0
				if bits == 32 {
					slack = 64 // half a step of float32 near full scale, 2^-25
				}
				if err := compare(got, int32sOf(t, sox(t, nil, path, "-t", "s32", "-")), slack); err != nil {
					t.Error(err)
				}
			})
		}
	}
}

// checkTag makes sure that the file is of the kind that the test is about.
func checkTag(t *testing.T, path, kind string, f Format) {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	want := uint16(0xFFFE)
	switch {
	case kind == "wavpcm" || f.Bits == 16 && f.Channels <= 2:
		want = 1
	case f.Float: // of any number of channels: extensible float is in layout_test.go
		want = 3
	}
	if got := binary.LittleEndian.Uint16(b[20:]); got != want {
		t.Errorf("sox wrote tag %#x, not %#x", got, want)
	}
}

// TestFilesForSox has sox read what we write, and compares with the integers
// that went in.
func TestFilesForSox(t *testing.T) {
	needSox(t)
	for _, f := range formats() {
		t.Run(f.String(), func(t *testing.T) {
			x := noise(5001, f.Channels, f.significant())
			path := filepath.Join(t.TempDir(), "ours.wav")
			if err := os.WriteFile(path, encoded(t, fileOf(f, x)), 0o644); err != nil {
				t.Fatal(err)
			}
			checkInfo(t, path, f)
			got := int32sOf(t, sox(t, nil, path, "-t", "s32", "-"))
			if len(got) != len(x) {
				t.Fatalf("sox reads %d samples, want %d", len(got), len(x))
			}
			for i := range x {
				if got[i] != x[i] {
					t.Fatalf("sox reads %d as sample %d, want %d", got[i], i, x[i])
				}
			}
		})
	}
}

// checkInfo wants sox to see the format that was asked for, without a warning.
func checkInfo(t *testing.T, path string, f Format) {
	t.Helper()
	for option, want := range map[string]string{
		"-r": strconv.Itoa(f.SampleRate), "-c": strconv.Itoa(f.Channels), "-b": strconv.Itoa(f.Bits), "-s": "5001",
		"-e": map[bool]string{true: "Floating Point PCM", false: "Signed Integer PCM"}[f.Float],
	} {
		if got := strings.TrimSpace(string(sox(t, nil, "--info", option, path))); got != want {
			t.Errorf("sox --info %s says %q, want %q", option, got, want)
		}
	}
}

// TestSoxAsText compares with the decimal numbers that sox prints.
func TestSoxAsText(t *testing.T) {
	needSox(t)
	path := bySox(t, Format{SampleRate: 48000, Channels: 2, Bits: 24}, "wav", noise(300, 2, 24))
	f, err := ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	frame := 0
	lines := bufio.NewScanner(bytes.NewReader(sox(t, nil, path, "-t", "dat", "-")))
	for lines.Scan() {
		fields := strings.Fields(lines.Text())
		if fields[0] == ";" {
			continue
		}
		for c, text := range fields[1:] {
			want, err := strconv.ParseFloat(text, 64)
			if err != nil {
				t.Fatal(err)
			}
			// sox prints 11 digits.
			if got := float64(f.Samples[c][frame]); math.Abs(got-want) > 1e-10 {
				t.Fatalf("frame %d channel %d is %v, sox prints %v", frame, c+1, got, want)
			}
		}
		frame++
	}
	if frame != 300 || len(f.Samples[0]) != 300 {
		t.Errorf("sox prints %d frames, we read %d, want 300", frame, len(f.Samples[0]))
	}
}

// TestExtraChunks puts chunks of other programs, of odd sizes too, around what
// sox wrote. sox and we read the same through them.
func TestExtraChunks(t *testing.T) {
	needSox(t)
	x := noise(501, 1, 24) // an odd number of bytes
	plain, err := os.ReadFile(bySox(t, Format{SampleRate: 48000, Channels: 1, Bits: 24}, "wav", x))
	if err != nil {
		t.Fatal(err)
	}
	b := riff(chunkOf("bext", strings.Repeat("b", 603)), string(plain[12:]), chunkOf("LIST", "INFOISFT\x05\x00\x00\x00none\x00\x00"))
	path := filepath.Join(t.TempDir(), "chunks.wav")
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	if got := sox(t, nil, path, "-t", "s32", "-"); !bytes.Equal(got, bytesOf(x)) {
		t.Fatal("sox does not read it as it was")
	}
	got, err := ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := compare(got, x, 0); err != nil {
		t.Error(err)
	}
}

// TestSoxReadsRF64 has sox read the long form.
func TestSoxReadsRF64(t *testing.T) {
	needSox(t)
	for _, f := range formats() {
		t.Run(f.String(), func(t *testing.T) {
			x := noise(1001, f.Channels, f.significant())
			var b bytes.Buffer
			if err := encode(&b, fileOf(f, x), 1000); err != nil {
				t.Fatal(err)
			}
			path := filepath.Join(t.TempDir(), "long.wav")
			if err := os.WriteFile(path, b.Bytes(), 0o644); err != nil {
				t.Fatal(err)
			}
			got := int32sOf(t, sox(t, nil, path, "-t", "s32", "-"))
			if want := bytesOf(x); !bytes.Equal(bytesOf(got), want) {
				t.Errorf("sox reads %d samples that differ from the %d written", len(got), len(x))
			}
		})
	}
}

// TestPipedBySox refuses what sox writes into a pipe, where it cannot go back to
// enter the lengths: the header then says 2 GB.
func TestPipedBySox(t *testing.T) {
	needSox(t)
	b := sox(t, bytesOf(noise(100, 1, 16)), "-t", "s32", "-r", "48000", "-c", "1", "-", "-t", "wav", "-b", "16", "-")
	_, err := Decode(bytes.NewReader(b))
	wantError(t, err, "cut short: it ends after 244 bytes, its header says")
}
