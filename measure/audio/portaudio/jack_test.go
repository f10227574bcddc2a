//go:build linux && cgo && !noaudio

package portaudio

import (
	"context"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
	"standoff/measure/audio/audiotest"
	"standoff/measure/audio/portaudio/jackbench"
)

func config() Config {
	return Config{SampleRate: 48000, Input: "mic", Output: "mic", InputChannel: 1, OutputChannel: 1, LoopbackChannel: 2}
}

func bench(t *testing.T, o jackbench.Options) *jackbench.Bench {
	t.Helper()
	if testing.Short() {
		t.Skip("needs an audio server")
	}
	return jackbench.Start(t, o)
}

func opened(t *testing.T) audio.Recorder {
	t.Helper()
	r, err := Open(context.Background(), config())
	if err != nil {
		t.Fatal(err)
	}
	return r
}

var echo = []float32{0, 0, 0.5, 0, -0.25, 0.125}

func TestContract(t *testing.T) {
	b := bench(t, jackbench.Options{})
	b.Path("mic", echo)
	audiotest.Run(t, func(t *testing.T) audio.Recorder { return opened(t) }, audiotest.RealTime())
}

// onset is where a signal begins; a convolution by transforms leaves rounding, some
// 1e−8, before it.
func onset(x []float32) int {
	return slices.IndexFunc(x, func(v float32) bool { return v > 1e-4 || v < -1e-4 })
}

func noise(n int) []float32 {
	x := make([]float32, n)
	state := uint32(1)
	for i := n / 10; i < n*8/10; i++ {
		state = state*1664525 + 1013904223
		x[i] = (float32(state>>8)/(1<<24) - 0.5) * 0.5
	}
	return x
}

// What comes back is the output convolved with the response, later by the same
// number of samples in every take; the loopback is the output itself.
func TestConvolvedPath(t *testing.T) {
	b := bench(t, jackbench.Options{Fast: true})
	b.Path("mic", echo)
	r := opened(t)
	x := noise(48000)
	latency := -1
	for take := 1; take <= 4; take++ {
		rec, err := r.Record(context.Background(), audio.Request{Excitation: x, SampleRate: 48000, Number: take})
		if err != nil {
			t.Fatal(err)
		}
		late := onset(rec.Loopback) - onset(x)
		if latency >= 0 && late != latency {
			t.Errorf("take %d comes %d samples late, the one before %d", take, late, latency)
		}
		latency = late
		checkPath(t, x, rec, late)
	}
}

func checkPath(t *testing.T, x []float32, rec *measure.Recording, late int) {
	t.Helper()
	var worst, worstLoop float64
	for i := 2 * late; i < len(x); i++ {
		var want float32
		for k, h := range echo {
			if j := i - late - k; j >= 0 {
				want += h * x[j]
			}
		}
		worst = math.Max(worst, math.Abs(float64(rec.Mic[i]-want)))
		worstLoop = math.Max(worstLoop, math.Abs(float64(rec.Loopback[i]-x[i-late])))
	}
	if worst > 1e-4 || worstLoop > 1e-6 {
		t.Errorf("the microphone is off by %g, the loopback by %g", worst, worstLoop)
	}
}

// Real time: a take lasts as long as its excitation, and no data are lost.
func TestRealTime(t *testing.T) {
	b := bench(t, jackbench.Options{})
	b.Path("mic", echo)
	x := noise(48000)
	begin := time.Now()
	rec, err := opened(t).Record(context.Background(), audio.Request{Excitation: x, SampleRate: 48000})
	if err != nil {
		t.Fatal(err)
	}
	if took := time.Since(begin); took < 900*time.Millisecond || took > 6*time.Second {
		t.Errorf("a take of 1 s took %v", took)
	}
	late := onset(rec.Loopback) - onset(x)
	checkPath(t, x, rec, late)
}

func TestDevices(t *testing.T) {
	b := bench(t, jackbench.Options{Fast: true})
	b.Path("mic", echo)
	b.Path("other", echo)
	list, err := Devices(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	i := slices.IndexFunc(list, func(d audio.Device) bool { return d.Name == "mic" })
	if i < 0 || list[i].Inputs != 2 || list[i].Outputs != 1 || list[i].SampleRate != 48000 {
		t.Errorf("devices: %+v", list)
	}
	for name, c := range map[string]Config{
		"no such name":   {48000, "nothing", "mic", 1, 1, 0},
		"two names":      {48000, "i", "mic", 1, 1, 0},
		"no such input":  {48000, "mic", "mic", 3, 1, 0},
		"no such output": {48000, "mic", "mic", 1, 2, 0},
		"no channel":     {48000, "mic", "mic", 0, 1, 0},
		"same channel":   {48000, "mic", "mic", 1, 1, 1},
	} {
		_, err := Open(context.Background(), c)
		if name == "two names" && err == nil {
			continue // "i" is a part of mic alone
		}
		if err == nil || !strings.HasPrefix(err.Error(), "audio") {
			t.Errorf("%s: %v", name, err)
		}
	}
	// A rate that the server does not have is refused when the stream is opened.
	c := config()
	c.SampleRate = 44100
	if r, err := Open(context.Background(), c); err == nil {
		if _, err = r.Record(context.Background(), audio.Request{Excitation: noise(1000), SampleRate: 44100}); err == nil {
			t.Error("44.1 kHz was recorded from a server at 48 kHz")
		}
	}
}

// A device that goes leaves a silent recording behind, or an error, and no hang.
func TestClientGone(t *testing.T) {
	b := bench(t, jackbench.Options{})
	b.Path("mic", echo)
	r := opened(t)
	x := noise(3 * 48000)
	time.AfterFunc(time.Second, func() { b.KillClient("mic") })
	begin := time.Now()
	rec, err := r.Record(context.Background(), audio.Request{Excitation: x, SampleRate: 48000})
	if took := time.Since(begin); took > 20*time.Second {
		t.Errorf("it took %v", took)
	}
	if err == nil && peak(rec.Mic[len(x)*6/10:len(x)*7/10]) > 1e-6 {
		t.Error("a device that is gone was heard")
	}
	if _, err := r.Record(context.Background(), audio.Request{Excitation: x, SampleRate: 48000}); err == nil {
		t.Error("a take from a device that is gone")
	}
}

func peak(x []float32) (p float32) {
	for _, v := range x {
		p = max(p, v, -v)
	}
	return p
}

// The server dies: an error in bounded time, and the process goes on. It must be
// the last test, since PortAudio cannot be used any more in this process.
func TestZServerGone(t *testing.T) {
	b := bench(t, jackbench.Options{})
	b.Path("mic", echo)
	r := opened(t)
	time.AfterFunc(time.Second, b.KillServer)
	begin := time.Now()
	_, err := r.Record(context.Background(), audio.Request{Excitation: noise(5 * 48000), SampleRate: 48000})
	if !errors.Is(err, ErrGone) {
		t.Errorf("%v, want ErrGone", err)
	}
	if took := time.Since(begin); took > 15*time.Second {
		t.Errorf("it took %v", took)
	}
	if _, err := r.Record(context.Background(), audio.Request{Excitation: noise(100), SampleRate: 48000}); err == nil {
		t.Error("a take without a server")
	}
	if _, err := Devices(context.Background()); err == nil {
		t.Error("devices without a server that can be trusted")
	}
}
