//go:build linux

// Package jackbench gives tests a real audio server with an acoustic path in it,
// without hardware: a JACK server with its dummy driver, and for each microphone a
// jconvolver client, which PortAudio lists as a duplex device. Its first input is
// the output convolved with an impulse response, its second the output itself, an
// electrical loopback.
//
//	b := jackbench.Start(t, jackbench.Options{Fast: true})
//	b.Path("mic", response)                 // the device "mic" is there
//	b.Place("30mm", near)                   // an impulse response by the name of a place
//	script := b.Mover("mic")                // a program that puts the microphone at a place:
//	                                        //   mover: {command: [SCRIPT, "{distance_label}"]}
//
// Everything ends with the test. Where the tools are missing the test is skipped,
// and in CI (CI=true) it fails.
package jackbench

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"standoff/measure/wav"
)

// Options of a bench; zero values are 48 kHz, 256 frames, real time.
type Options struct {
	Rate   int
	Period int  // frames
	Fast   bool // as fast as the processor goes, once there is a device
}

// Bench is a running server.
type Bench struct {
	t      testing.TB
	dir    string
	server string
	opts   Options
	jackd  *exec.Cmd
}

// Start runs a server and points the test's environment at it.
func Start(t testing.TB, o Options) *Bench {
	t.Helper()
	if o.Rate == 0 {
		o.Rate = 48000
	}
	if o.Period == 0 {
		o.Period = 256
	}
	for _, tool := range []string{"jackd", "jconvolver", "jack_lsp", "jack_freewheel"} {
		need(t, tool)
	}
	b := &Bench{t: t, dir: t.TempDir(), opts: o, server: fmt.Sprintf("standoff-%d-%d", os.Getpid(), time.Now().UnixNano()%1e6)}
	t.Setenv("JACK_DEFAULT_SERVER", b.server)
	t.Setenv("JACK_NO_START_SERVER", "1")
	t.Setenv("JACK_NO_AUDIO_RESERVATION", "1")
	// One PCM that cannot be opened: PortAudio's ALSA part stumbles over none.
	t.Setenv("ALSA_CONFIG_PATH", b.write("asound.conf", "pcm.none { type hw card 99 }\n"))
	b.alone()
	t.Cleanup(b.stop)
	b.serve()
	return b
}

// alone waits until no other bench runs on this machine, in whatever process: all
// JACK servers share one registry, and a server killed on purpose by one test
// leaves it locked for the others.
func (b *Bench) alone() {
	b.t.Helper()
	f, err := os.OpenFile(filepath.Join(os.TempDir(), "standoff-jackbench.lock"), os.O_CREATE|os.O_RDWR, 0o666)
	if err != nil {
		b.t.Fatal(err)
	}
	b.t.Cleanup(func() { f.Close() })
	for begin := time.Now(); ; time.Sleep(50 * time.Millisecond) {
		if syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB) == nil {
			return
		}
		if time.Since(begin) > 5*time.Minute {
			b.t.Fatal("another bench has not ended in 5 minutes")
		}
	}
}

// ask runs a small JACK tool, which hangs when the server does.
func ask(tool string, args ...string) ([]byte, error) {
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
	defer cancel()
	return exec.CommandContext(ctx, tool, args...).Output()
}

func need(t testing.TB, tool string) {
	t.Helper()
	if _, err := exec.LookPath(tool); err == nil {
		return
	}
	if os.Getenv("CI") == "true" {
		t.Fatalf("%s is not installed (Debian: jackd2, jconvolver)", tool)
	}
	t.Skipf("%s is not installed", tool)
}

func (b *Bench) write(name, text string) string {
	path := filepath.Join(b.dir, name)
	if err := os.WriteFile(path, []byte(text), 0o777); err != nil {
		b.t.Fatal(err)
	}
	return path
}

// serve starts jackd: synchronously (-S), since periods are lost under load
// otherwise, and in real time where that is allowed.
func (b *Bench) serve() {
	b.t.Helper()
	args := []string{"-S", "-p", "256", "-n", b.server, "-d", "dummy", "-r", strconv.Itoa(b.opts.Rate), "-p", strconv.Itoa(b.opts.Period), "-C", "0", "-P", "0"}
	schedule := []string{"-r"}
	if exec.Command("chrt", "-f", "10", "true").Run() == nil {
		schedule = []string{"-R", "-P", "10"}
	}
	b.jackd = b.background("jackd", append(schedule, args...)...)
	b.until("jackd did not start", func() bool {
		_, err := ask("jack_lsp")
		return err == nil
	})
}

// background starts a program whose output goes to a file of its name.
func (b *Bench) background(name string, args ...string) *exec.Cmd {
	b.t.Helper()
	log, err := os.Create(filepath.Join(b.dir, name+".log"))
	if err != nil {
		b.t.Fatal(err)
	}
	defer log.Close()
	cmd := exec.Command(name, args...)
	cmd.Stdout, cmd.Stderr = log, log
	if err := cmd.Start(); err != nil {
		b.t.Fatal(err)
	}
	go cmd.Wait()
	return cmd
}

func (b *Bench) until(what string, ok func() bool) {
	b.t.Helper()
	for begin := time.Now(); time.Since(begin) < 15*time.Second; time.Sleep(20 * time.Millisecond) {
		if ok() {
			return
		}
	}
	logs, _ := filepath.Glob(filepath.Join(b.dir, "*.log"))
	for _, l := range logs {
		text, _ := os.ReadFile(l)
		b.t.Logf("%s:\n%s", filepath.Base(l), text)
	}
	b.t.Fatal(what)
}

// Place keeps an impulse response under the name of a place.
func (b *Bench) Place(name string, response []float32) {
	b.t.Helper()
	f, err := os.Create(filepath.Join(b.dir, name+".wav"))
	if err != nil {
		b.t.Fatal(err)
	}
	defer f.Close()
	file := &wav.File{Format: wav.Format{SampleRate: b.opts.Rate, Channels: 1, Bits: 32, Float: true}, Samples: [][]float32{response}}
	if err := wav.Encode(f, file); err != nil {
		b.t.Fatal(err)
	}
}

// Path makes a device whose microphone hears the output through a response, or
// puts an existing one there.
func (b *Bench) Path(device string, response []float32) {
	b.t.Helper()
	b.Place("path-"+device, response)
	b.move(device, "path-"+device)
}

func (b *Bench) move(device, place string) {
	b.t.Helper()
	if out, err := exec.Command(b.Mover(device), place).CombinedOutput(); err != nil {
		b.t.Fatalf("mover: %v\n%s", err, out)
	}
}

// mover ends the device's client and starts another one with the place's response.
// $1 is the place. The new client belongs to no terminal and to no pipe.
const mover = `#!/bin/sh
set -eu
dir='%s' name='%s'
[ -f "$dir/$1.wav" ] || { echo "no place $1" >&2; exit 1; }
# A client that comes up in freewheel takes it for real time, and falls behind.
[ %d = 0 ] || timeout 5 jack_freewheel n > /dev/null 2>&1
if [ -f "$dir/$name.pid" ]; then
  pid=$(cat "$dir/$name.pid")
  kill -INT "$pid" 2>/dev/null || true
  i=0
  while timeout 5 jack_lsp 2>/dev/null | grep -q "^$name:"; do
    i=$((i+1)); [ $i -lt 200 ] || { kill -KILL "$pid" 2>/dev/null || true; break; }
    sleep 0.02
  done
fi
cat > "$dir/$name.conf" <<X
/convolver/new 1 2 %d 65536 1.0
/input/name 1 speaker
/output/name 1 microphone
/output/name 2 loopback
/impulse/read 1 1 1.0 0 0 0 1 $dir/$1.wav
/impulse/dirac 1 2 1.0 0
X
setsid jconvolver -s "$JACK_DEFAULT_SERVER" -N "$name" "$dir/$name.conf" > "$dir/$name.log" 2>&1 < /dev/null &
echo $! > "$dir/$name.pid"
i=0
until timeout 5 jack_lsp 2>/dev/null | grep -qx "$name:loopback"; do
  i=$((i+1)); [ $i -lt 500 ] || { echo "$name did not come up" >&2; cat "$dir/$name.log" >&2; exit 1; }
  sleep 0.02
done
[ %d = 0 ] || timeout 5 jack_freewheel y > /dev/null 2>&1
`

// Mover is a program that takes the name of a place and puts the device's
// microphone there.
func (b *Bench) Mover(device string) string {
	b.t.Helper()
	fast := 0
	if b.opts.Fast {
		fast = 1
	}
	return b.write("move-"+device+".sh", fmt.Sprintf(mover, b.dir, device, fast, b.opts.Period, fast))
}

// KillServer ends the server as a crash would.
func (b *Bench) KillServer() { b.jackd.Process.Kill() }

// KillClient ends a device as a cable pulled would.
func (b *Bench) KillClient(device string) {
	for _, pid := range b.pids() {
		if pid.name == device {
			syscall.Kill(pid.number, syscall.SIGINT)
		}
	}
	b.until(device+" does not go", func() bool {
		out, _ := ask("jack_lsp")
		return !strings.Contains(string(out), device+":")
	})
}

type process struct {
	name   string
	number int
}

func (b *Bench) pids() (out []process) {
	files, _ := filepath.Glob(filepath.Join(b.dir, "*.pid"))
	for _, f := range files {
		text, _ := os.ReadFile(f)
		if n, err := strconv.Atoi(strings.TrimSpace(string(text))); err == nil {
			out = append(out, process{strings.TrimSuffix(filepath.Base(f), ".pid"), n})
		}
	}
	return out
}

func (b *Bench) stop() {
	for _, p := range b.pids() {
		end(p.number)
	}
	if b.jackd != nil {
		end(b.jackd.Process.Pid)
	}
	left, _ := filepath.Glob("/dev/shm/jack*" + b.server + "*")
	for _, f := range left {
		os.Remove(f)
	}
}

// end asks a process to go, and makes it go after two seconds.
func end(pid int) {
	syscall.Kill(pid, syscall.SIGINT)
	for range 100 {
		if syscall.Kill(pid, 0) != nil {
			return
		}
		time.Sleep(20 * time.Millisecond)
	}
	syscall.Kill(pid, syscall.SIGKILL)
}
