package wav

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"strings"
	"testing"
)

// needSox fails where the tests have to be complete and skips elsewhere.
func needSox(t testing.TB) {
	t.Helper()
	_, err := exec.LookPath("sox")
	switch {
	case err == nil:
	case os.Getenv("CI") == "true":
		t.Fatalf("CI must have sox: %v", err)
	default:
		t.Skipf("sox, which these files are compared with, is not here: %v", err)
	}
}

// sox runs sox, without dither wherever it would convert, and gives its output.
// Whatever it warns of is an error, but for two things: it misses a second
// extension behind that of extensible float, and it cannot go back in a pipe.
func sox(t testing.TB, in []byte, args ...string) []byte {
	t.Helper()
	if args[0] != "--info" {
		args = append([]string{"-D"}, args...)
	}
	cmd := exec.Command("sox", args...)
	var out, errs bytes.Buffer
	cmd.Stdin, cmd.Stdout, cmd.Stderr = bytes.NewReader(in), &out, &errs
	err := cmd.Run()
	warned := errs.String()
	for _, known := range []string{"WARN wav: wave header missing extended part of fmt chunk", "WARN wav: Length in output .wav header will be wrong"} {
		warned = strings.ReplaceAll(warned, known, "")
	}
	if err != nil || strings.Contains(warned, "WARN") {
		t.Fatalf("%v: %v\n%s", cmd.Args, err, errs.Bytes())
	}
	return out.Bytes()
}

// noise is full-scale noise with the ends of the scale in it, as 32-bit integers
// in interleaved order, of which the lowest 32−bits bits are zero.
func noise(frames, channels, bits int) []int32 {
	rng := rand.New(rand.NewPCG(1, uint64(channels*100+bits)))
	x := make([]int32, frames*channels)
	for i := range x {
		x[i] = int32(rng.Uint32()) >> (32 - bits) << (32 - bits)
	}
	step := int32(1) << (32 - bits)
	copy(x, []int32{math.MinInt32, math.MaxInt32 &^ (step - 1), 0, step, -step})
	return x
}

func bytesOf(x any) []byte {
	b, err := binary.Append(nil, binary.LittleEndian, x)
	if err != nil {
		panic(err)
	}
	return b
}

func int32sOf(t testing.TB, b []byte) []int32 {
	t.Helper()
	x := make([]int32, len(b)/4)
	if _, err := binary.Decode(b, binary.LittleEndian, x); err != nil {
		t.Fatal(err)
	}
	return x
}

// fileOf makes a file of interleaved 32-bit integers at full scale.
func fileOf(f Format, x []int32) *File {
	out := &File{Format: f, Samples: make([][]float32, f.Channels)}
	for i, v := range x {
		c := i % f.Channels
		out.Samples[c] = append(out.Samples[c], float32(float64(v)/(1<<31)))
	}
	return out
}

// compare wants a file to hold the interleaved 32-bit integers x, each to within
// slack.
func compare(f *File, x []int32, slack float64) error {
	if n := len(f.Samples) * len(f.Samples[0]); n != len(x) {
		return fmt.Errorf("%d samples, want %d", n, len(x))
	}
	for i, want := range x {
		got := f.Samples[i%f.Channels][i/f.Channels]
		if math.Abs(float64(got)*(1<<31)-float64(want)) > slack {
			return fmt.Errorf("sample %d is %v, want %v", i, got, float64(want)/(1<<31))
		}
	}
	return nil
}

func formats() []Format {
	var out []Format
	for _, channels := range []int{1, 2, 3, 8} {
		for _, kind := range []Format{{Bits: 16}, {Bits: 24}, {Bits: 32}, {Bits: 32, Float: true}} {
			out = append(out, Format{SampleRate: 44100 + channels, Channels: channels, Bits: kind.Bits, Float: kind.Float})
		}
	}
	return out
}

func (f Format) String() string {
	kind := "pcm"
	if f.Float {
		kind = "float"
	}
	return fmt.Sprintf("%d×%s%d", f.Channels, kind, f.Bits)
}

// significant is the number of bits that samples of a format have in float32.
func (f Format) significant() int { return min(f.Bits, 24) }

func encoded(t testing.TB, f *File) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Encode(&b, f); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}
