package replay

import (
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"standoff/measure"
	"standoff/measure/audio"
	"standoff/measure/audio/audiotest"
	"standoff/measure/wav"
)

// save writes a file of 16-bit steps, laid out here and not by package wav:
// plain PCM as in the RIFF document of 1991.
func save(t *testing.T, name string, rate, channels int, interleaved ...int16) string {
	t.Helper()
	return saveAs(t, name, 1, rate, channels, 16, interleaved)
}

func saveFloat(t *testing.T, name string, rate, channels int, interleaved ...float32) string {
	t.Helper()
	return saveAs(t, name, 3, rate, channels, 32, interleaved)
}

func saveAs(t *testing.T, name string, tag, rate, channels, bits int, samples any) string {
	t.Helper()
	var b bytes.Buffer
	put := func(x any) {
		if err := binary.Write(&b, binary.LittleEndian, x); err != nil {
			t.Fatal(err)
		}
	}
	size := binary.Size(samples)
	b.WriteString("RIFF")
	put(uint32(36 + size))
	b.WriteString("WAVEfmt \x10\x00\x00\x00")
	put([]uint16{uint16(tag), uint16(channels)})
	put([]uint32{uint32(rate), uint32(rate * channels * bits / 8)})
	put([]uint16{uint16(channels * bits / 8), uint16(bits)})
	b.WriteString("data")
	put(uint32(size))
	put(samples)
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, b.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

const step = 1.0 / 32768

func request(samples, number int) audio.Request {
	return audio.Request{Excitation: make([]float32, samples), SampleRate: 48000,
		Distance: measure.Distance{Label: "30mm", Metres: 0.03}, Number: number}
}

func TestContract(t *testing.T) {
	ramp := make([]int16, 2000)
	for i := range ramp {
		ramp[i] = int16(i * 7919)
	}
	path := save(t, "take.wav", 48000, 2, ramp...)
	req := request(4000, 1) // longer than the file
	for i := range req.Excitation {
		req.Excitation[i] = float32(i%100) / 100
	}
	for _, loopback := range []int{0, 2} {
		audiotest.Run(t, func(*testing.T) audio.Recorder {
			return New(48000, map[Key]string{{"30mm", 1}: path}, 1, loopback)
		}, audiotest.Instant(), audiotest.WithRequest(req))
	}
}

func TestRecordCutsAndFills(t *testing.T) {
	files := map[Key]string{
		{"30mm", 1}: save(t, "1.wav", 48000, 2, 1, 10, 2, 20, 3, 30),
		{"30mm", 2}: save(t, "2.wav", 48000, 2, 4, 40, -32768, 32767, 6, 60),
	}
	rec := New(48000, files, 2, 1)
	clear(files) // the recorder keeps its own list
	for _, c := range []struct {
		samples, number int
		mic, loopback   []float32
	}{
		{3, 1, []float32{10 * step, 20 * step, 30 * step}, []float32{1 * step, 2 * step, 3 * step}},
		{5, 1, []float32{10 * step, 20 * step, 30 * step, 0, 0}, []float32{1 * step, 2 * step, 3 * step, 0, 0}},
		{2, 2, []float32{40 * step, 32767 * step}, []float32{4 * step, -1}},
	} {
		var meters []audio.Meter
		req := request(c.samples, c.number)
		req.Meter = func(m audio.Meter) { meters = append(meters, m) }
		got, err := rec.Record(context.Background(), req)
		if err != nil {
			t.Fatal(err)
		}
		if !slices.Equal(got.Mic, c.mic) || !slices.Equal(got.Loopback, c.loopback) || got.SampleRate != 48000 || !got.Started.IsZero() {
			t.Errorf("%d samples of take %d: %+v", c.samples, c.number, got)
		}
		if want := (audio.Meter{Done: 1, Peak: float64(slices.Max(c.mic))}); !slices.Equal(meters, []audio.Meter{want}) {
			t.Errorf("meter %v, want %v once", meters, want)
		}
	}
}

func TestRecordRefuses(t *testing.T) {
	rec := New(48000, map[Key]string{
		{"30mm", 1}: save(t, "slow.wav", 44100, 1, 1, 2),
		{"30mm", 2}: filepath.Join(t.TempDir(), "none.wav"),
		{"30mm", 3}: saveFloat(t, "hot.wav", 48000, 1, 0, 1, -1.25),
		{"30mm", 4}: saveFloat(t, "nan.wav", 48000, 1, 0, 0, 0, float32(math.NaN())),
		{"30mm", 5}: t.TempDir(),
		{"40mm", 1}: save(t, "good.wav", 48000, 1, 1, 2),
	}, 1, 0)
	for number, want := range map[int]string{
		1: "slow.wav: recorded at 44100 Hz, but 48000 Hz are wanted",
		2: "none.wav",
		3: "hot.wav: microphone: sample 2 is -1.25, beyond full scale",
		4: "nan.wav: microphone: sample 3 is NaN",
		5: "not a regular file",
		6: "there is no file for take 6 at 30mm",
	} {
		got, err := rec.Record(context.Background(), request(3, number))
		if got != nil || err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("take %d: %v, %v, want %q", number, got, err, want)
		}
		var mismatch *RateMismatchError
		if errors.As(err, &mismatch) != (number == 1) {
			t.Errorf("take %d: %v is a rate mismatch or is none", number, err)
		}
		if number == 1 && (mismatch.File != 44100 || mismatch.Want != 48000 || filepath.Base(mismatch.Path) != "slow.wav") {
			t.Errorf("%+v", mismatch)
		}
		if number == 2 && !errors.Is(err, fs.ErrNotExist) {
			t.Error(err)
		}
	}
	// What is cut away may be beyond full scale.
	if _, err := rec.Record(context.Background(), request(2, 3)); err != nil {
		t.Error(err)
	}
	other := request(3, 1)
	other.SampleRate = 44100
	if _, err := rec.Record(context.Background(), other); err == nil || !strings.Contains(err.Error(), "a take at 44100 Hz is asked for, but the files were opened for 48000 Hz") {
		t.Error(err)
	}
}

// TestRecordStopsReading ends a context in the middle of a file.
func TestRecordStopsReading(t *testing.T) {
	path := save(t, "long.wav", 48000, 1, make([]int16, 1<<20)...)
	rec := New(48000, map[Key]string{{"30mm", 1}: path}, 1, 0)
	ctx := &countdown{Context: context.Background(), left: 5}
	got, err := rec.Record(ctx, request(3, 1))
	if got != nil || !errors.Is(err, context.Canceled) || errors.Is(err, wav.ErrFormat) || ctx.left < -1 {
		t.Errorf("%v, %v, asked %d times more", got, err, -ctx.left)
	}
}

// countdown is a context that is over after it has been asked some times.
type countdown struct {
	context.Context
	left int
}

func (c *countdown) Err() error {
	if c.left--; c.left < 0 {
		return context.Canceled
	}
	return nil
}

func TestLoad(t *testing.T) {
	path := saveFloat(t, "import.wav", 96000, 3, 0.5, 1.5, -2, 0.25, 1, 0)
	got, err := Load(path, 2, 3)
	if err != nil {
		t.Fatal(err)
	}
	if got.SampleRate != 96000 || !slices.Equal(got.Mic, []float32{1.5, 1}) || !slices.Equal(got.Loopback, []float32{-2, 0}) {
		t.Errorf("%+v", got)
	}
	if got, err = Load(path, 1, 0); err != nil || !slices.Equal(got.Mic, []float32{0.5, 0.25}) || got.Loopback != nil {
		t.Errorf("%+v, %v", got, err)
	}
}

func TestLoadRefuses(t *testing.T) {
	inf := float32(math.Inf(-1))
	cut := save(t, "cut.wav", 48000, 1, 1, 2, 3)
	if err := os.Truncate(cut, 48); err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	for _, c := range []struct {
		path              string
		channel, loopback int
		want              string
	}{
		{save(t, "a.wav", 48000, 2, 1, 2), 3, 0, "a.wav: microphone: channel 3 is asked for, the file has 2"},
		{save(t, "b.wav", 48000, 2, 1, 2), 0, 0, "b.wav: microphone: channel 0 is asked for, the file has 2"},
		{save(t, "c.wav", 48000, 2, 1, 2), 1, 3, "c.wav: loopback: channel 3 is asked for, the file has 2"},
		{save(t, "d.wav", 48000, 2, 1, 2), 1, -1, "d.wav: loopback: channel -1 is asked for"},
		{save(t, "e.wav", 48000, 2, 1, 2), 2, 2, "e.wav: channel 2 cannot be both microphone and loopback"},
		{save(t, "f.wav", 48000, 1), 1, 0, "f.wav: microphone: the file has no samples"},
		{saveFloat(t, "g.wav", 48000, 2, 0, 0, 0, inf), 1, 2, "g.wav: loopback: sample 1 is -Inf"},
		{cut, 1, 0, `cut.wav: chunk "data" at byte 36: cut short: it ends after 48 bytes, its header says 50`},
		{filepath.Join(dir, "none.wav"), 1, 0, "none.wav"},
		{dir, 1, 0, dir},
	} {
		got, err := Load(c.path, c.channel, c.loopback)
		if got != nil || err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v, %v, want %q", got, err, c.want)
		}
		if err != nil && strings.Count(err.Error(), c.path) != 1 {
			t.Errorf("%v does not name the file once", err)
		}
	}
	// What the other channels hold does not matter.
	if _, err := Load(saveFloat(t, "h.wav", 48000, 2, 0, inf), 1, 0); err != nil {
		t.Error(err)
	}
}
