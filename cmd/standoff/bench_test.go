//go:build linux

package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"standoff/measure/session"
)

// BenchmarkSession is the analysis of a session of 8 distances, 2 repeats and
// sweeps of 4 s at 48 kHz, held against a numpy/scipy script that does the same on
// the same files in the same run. It reports
//
//	ours_s, script_s   analysis alone, best of three, programs already running
//	time_ratio         ours/script
//	peak_MB            most memory of the program, with report and figures
//	script_MB          most memory of the script
//	differs            of the mixes found, in parts per thousand
func BenchmarkSession(b *testing.B) {
	py := scipyOrSkip(b)
	dir := b.TempDir()
	rig := strings.Replace(string(readConfig(b, "virtual-cardioid.yaml")), "duration: 2s", "duration: 4s", 1)
	path := filepath.Join(dir, "rig.yaml")
	if err := os.WriteFile(path, []byte(rig), 0o666); err != nil {
		b.Fatal(err)
	}
	into, sweep := filepath.Join(dir, "s"), filepath.Join(dir, "sweep.wav")
	for _, args := range [][]string{{"-q", "run", path, "--into", into}, {"-q", "sweep", path, "--out", sweep}} {
		if code := run(context.Background(), args, nil, io.Discard, os.Stderr); code != exitDone {
			b.Fatalf("%v: exit %d", args, code)
		}
	}
	for b.Loop() {
		ours, a := bestAnalysis(b, into)
		theirs := runScript(b, py, into, sweep, a)
		b.ReportMetric(ours.Seconds(), "ours_s")
		b.ReportMetric(theirs.Seconds, "script_s")
		b.ReportMetric(ours.Seconds()/theirs.Seconds, "time_ratio")
		b.ReportMetric(peakOfProgram(b, dir, into), "peak_MB")
		b.ReportMetric(theirs.PeakMB, "script_MB")
		b.ReportMetric(1e3*(a.fit.Best().Acoustics.Beta-theirs.Mix), "differs")
	}
	b.ReportMetric(0, "ns/op")
}

func readConfig(tb testing.TB, name string) []byte {
	raw, err := os.ReadFile(filepath.Join("..", "..", "configs", name))
	if err != nil {
		tb.Fatal(err)
	}
	return raw
}

func scipyOrSkip(b *testing.B) string {
	for _, p := range []string{"/usr/bin/python3", "python3"} {
		if exec.Command(p, "-c", "import scipy").Run() == nil {
			return p
		}
	}
	b.Skip("no python3 with scipy")
	return ""
}

func bestAnalysis(b *testing.B, dir string) (best time.Duration, a *analysed) {
	best = time.Hour
	for range 3 {
		f, err := session.Open(dir)
		if err != nil {
			b.Fatal(err)
		}
		runtime.GC()
		begin := time.Now()
		if a, err = analyse(context.Background(), f, "bench"); err != nil {
			b.Fatal(err)
		}
		best = min(best, time.Since(begin))
		f.Close()
	}
	return best, a
}

// script is what the script says of itself.
type script struct {
	Mix     float64 `json:"mix"`
	Spacing float64 `json:"spacing_m"`
	Seconds float64 `json:"seconds"`
	PeakMB  float64 `json:"peak_mb"`
}

func runScript(tb testing.TB, py, dir, sweep string, a *analysed) (best script) {
	best.Seconds = 1e9
	for range 3 {
		cmd := exec.Command(py, "testdata/chain.py", dir, sweep, fmt.Sprint(a.rig.Air.SpeedOfSound()), fmt.Sprint(a.gate.Length))
		cmd.Stderr = os.Stderr
		out, err := cmd.Output()
		if err != nil {
			tb.Fatal(err)
		}
		var s script
		if err := json.Unmarshal(out, &s); err != nil {
			tb.Fatal(err)
		}
		if s.Seconds < best.Seconds {
			best = s
		}
	}
	return best
}

// peakOfProgram builds the program and lets it do everything on the folder.
func peakOfProgram(b *testing.B, dir, into string) float64 {
	bin := filepath.Join(dir, "standoff")
	if out, err := exec.Command("go", "build", "-tags", "noaudio", "-o", bin, ".").CombinedOutput(); err != nil {
		b.Fatalf("%v\n%s", err, out)
	}
	cmd := exec.Command(bin, "-q", "fit", into)
	if err := cmd.Start(); err != nil {
		b.Fatal(err)
	}
	done := make(chan error, 1)
	go func() { done <- cmd.Wait() }()
	// What the kernel says of an ended child counts the parent before exec; its
	// high-water mark while it runs does not.
	var peak float64
	for {
		select {
		case err := <-done:
			if err != nil {
				b.Fatal(err)
			}
			return peak
		case <-time.After(5 * time.Millisecond):
			peak = max(peak, highWater(cmd.Process.Pid))
		}
	}
}

// highWater is the most memory a process has had, MB.
func highWater(pid int) (mb float64) {
	raw, _ := os.ReadFile(fmt.Sprintf("/proc/%d/status", pid))
	for _, line := range strings.Split(string(raw), "\n") {
		if rest, ok := strings.CutPrefix(line, "VmHWM:"); ok {
			fmt.Sscan(rest, &mb)
		}
	}
	return mb / 1024
}
