package wav

import (
	"bytes"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// same compares bit by bit, so that NaN is the same as itself.
func same(a, b *File) bool {
	if a.Format != b.Format || len(a.Samples) != len(b.Samples) {
		return false
	}
	for c := range a.Samples {
		if len(a.Samples[c]) != len(b.Samples[c]) {
			return false
		}
		for i, v := range a.Samples[c] {
			if math.Float32bits(v) != math.Float32bits(b.Samples[c][i]) {
				return false
			}
		}
	}
	return true
}

// FuzzDecode: no input makes Decode panic; what it accepts accounts for every
// byte of samples, and survives being written and read again.
func FuzzDecode(f *testing.F) {
	f.Add(small())
	f.Fuzz(func(t *testing.T, b []byte) {
		file, err := Decode(bytes.NewReader(b))
		if err != nil {
			if file != nil {
				t.Error("a file and an error")
			}
			return
		}
		n := 0
		for _, s := range file.Samples {
			n += len(s) * file.Bits / 8
		}
		if n > len(b) {
			t.Errorf("%d bytes of samples from %d bytes", n, len(b))
		}
		for _, longest := range []int64{longestRIFF, 0} {
			var again bytes.Buffer
			if err := encode(&again, file, longest); err != nil {
				t.Fatal(err)
			}
			if got, err := Decode(&again); err != nil || !same(got, file) {
				t.Errorf("came back differently: %v", err)
			}
		}
	})
}

// TestRoundTrip: whatever samples of whatever format come back, float bit for
// bit, integers to half a step or the end of the scale.
func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		f := drawFile(t)
		longest := rapid.SampledFrom([]int64{0, 100, longestRIFF}).Draw(t, "longest")
		var b bytes.Buffer
		if err := encode(&b, f, longest); err != nil {
			t.Fatal(err)
		}
		got, err := Decode(&b)
		if err != nil {
			t.Fatal(err)
		}
		if f.Float && !same(got, f) {
			t.Fatalf("%v came back as %v", f, got)
		}
		if got.Format != f.Format || len(got.Samples) != f.Channels {
			t.Fatalf("%+v came back as %+v", f.Format, got.Format)
		}
		checkSteps(t, f, got)
	})
}

func drawFile(t *rapid.T) *File {
	f := &File{Format: Format{SampleRate: rapid.IntRange(1, 1<<24).Draw(t, "rate"), Channels: rapid.IntRange(1, 8).Draw(t, "channels")}}
	f.Bits = rapid.SampledFrom([]int{16, 24, 32}).Draw(t, "bits")
	f.Float = f.Bits == 32 && rapid.Bool().Draw(t, "float")
	frames := rapid.IntRange(0, 20).Draw(t, "frames")
	value := rapid.OneOf(rapid.Float32Range(-1, 1), rapid.Float32(), rapid.SampledFrom([]float32{1, -1, float32(math.Inf(1))}))
	if f.Float {
		// Any bits at all, NaN with all its payloads included.
		value = rapid.Map(rapid.Uint32(), math.Float32frombits)
	}
	for range f.Channels {
		f.Samples = append(f.Samples, rapid.SliceOfN(value, frames, frames).Draw(t, "samples"))
	}
	return f
}

func checkSteps(t *rapid.T, f, got *File) {
	if f.Float {
		return
	}
	step := math.Exp2(float64(1 - f.Bits))
	for c := range f.Samples {
		if len(got.Samples[c]) != len(f.Samples[c]) {
			t.Fatalf("%d samples came back as %d", len(f.Samples[c]), len(got.Samples[c]))
		}
		for i, v := range f.Samples[c] {
			want := math.Max(-1, math.Min(1-step, float64(v)))
			// float32 rounds by up to 2^-25 where the integer has more than 24 bits.
			slack := math.Max(step/2, math.Exp2(-25))
			if g := float64(got.Samples[c][i]); math.Abs(g-want) > slack {
				t.Fatalf("%v came back as %v, more than half a step of %v away", v, g, step)
			}
		}
	}
}
