package session

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

const crashDir = "SESSION_TEST_CRASH_DIR"

func TestMain(m *testing.M) {
	if dir := os.Getenv(crashDir); dir != "" {
		if err := recordForEver(dir); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
	}
	os.Exit(m.Run())
}

// recordForEver is the process that is killed. It says on standard output which
// take it has been told is safe.
func recordForEver(dir string) error {
	r, err := rigOf(rigText)
	if err != nil {
		return err
	}
	f, err := OpenOrCreate(dir, r, Options{Version: "0.1.0"})
	if err != nil {
		return err
	}
	fmt.Println("ready")
	for {
		n := f.NextNumber("30mm")
		take, err := f.AddTake(near, "bench", recording(n, 20000, n%2 == 0))
		if err != nil {
			return err
		}
		fmt.Println(take.File, take.SHA256)
		if err := f.Judge(take.File, Verdict{Accepted: true}); err != nil {
			return err
		}
		if err := f.WriteFile("result.json", writeText("{}")); err != nil {
			return err
		}
	}
}

// TestKilledWhileRecording kills that process again and again, on one folder: it
// must open each time with every take that was called safe. (What a power cut
// does beyond that rests on fsync and cannot be shown by a test on a live system.)
func TestKilledWhileRecording(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "s")
	safe := map[string]string{}
	rounds := 25
	if testing.Short() {
		rounds = 5
	}
	for round := range rounds {
		killed(t, dir, safe, round%4, float64(round*37%61)/60)
		f := reopen(t, dir)
		sums := tree(t, dir)
		takes := f.Takes()
		for _, take := range takes {
			rec, err := f.Load(take)
			if err != nil {
				t.Fatal(err)
			}
			if want := recording(take.Number, 20000, take.Number%2 == 0); rec.Mic[19999] != want.Mic[19999] || (rec.Loopback == nil) != (want.Loopback == nil) {
				t.Fatalf("%s is not what was recorded", take.File)
			}
		}
		for file, sum := range safe {
			i := f.man.find(file)
			if i < 0 || takes[i].SHA256 != sum || sums[file] != sum {
				t.Fatalf("round %d: %s is lost", round, file)
			}
		}
		f.Close()
	}
	if len(safe) < rounds {
		t.Fatalf("only %d takes in %d rounds", len(safe), rounds)
	}
	f := create(t, dir)
	if !strings.Contains(codes(f.Notices()), "cut-off") {
		t.Errorf("notices %v", f.Notices())
	}
	t.Logf("%d takes called safe, %d found", len(safe), len(f.Takes()))
}

// killed runs the process until it has called so many takes safe, and kills it
// that part of the time which a take needs later, so that every step is met on
// machines of any speed.
func killed(t *testing.T, dir string, safe map[string]string, takes int, part float64) {
	t.Helper()
	cmd := recorder(t, dir)
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	var complaint strings.Builder
	cmd.Stderr = &complaint
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	needs, last := 10*time.Millisecond, time.Now()
	lines := bufio.NewScanner(out)
	for n := 0; lines.Scan(); n++ {
		if file, sum, ok := strings.Cut(lines.Text(), " "); ok && len(sum) == 64 {
			safe[file] = sum
			needs = time.Since(last)
		}
		if last = time.Now(); n == takes {
			time.AfterFunc(time.Duration(part*float64(needs)), func() { cmd.Process.Kill() })
		}
	}
	cmd.Wait()
	if complaint.Len() > 0 {
		t.Fatal(complaint.String())
	}
}

func recorder(t *testing.T, dir string) *exec.Cmd {
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
	t.Cleanup(cancel)
	cmd := exec.CommandContext(ctx, self)
	cmd.Env = append(os.Environ(), crashDir+"="+dir)
	return cmd
}

// TestSecondRunIsRefused tries from another process, which is what the lock is for.
func TestSecondRunIsRefused(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	out, err := recorder(t, dir).CombinedOutput()
	want := fmt.Sprintf("%s is in use by process %d on ", dir, os.Getpid())
	if err == nil || !strings.Contains(string(out), want) {
		t.Fatalf("%v: %s", err, out)
	}
	_, err = OpenOrCreate(dir, parse(t, rigText), usual)
	var held *BusyError
	if !errors.As(err, &held) || held.PID != os.Getpid() || !held.Since.Equal(noon) || Hint(err) == "" {
		t.Fatalf("%v", err)
	}
	if err := reopen(t, dir).WriteFile("result.json", writeText("{}")); err != nil {
		t.Errorf("reading is not refused: %v", err)
	}
	f.Close()
	if g := create(t, dir); len(g.Notices()) != 0 {
		t.Errorf("notices %v", g.Notices())
	}
}

// TestOnlyOneGetsIn lets many try at once to open, add and close.
func TestOnlyOneGetsIn(t *testing.T) {
	dir := t.TempDir()
	create(t, dir).Close()
	const goroutines, each = 8, 5
	done := make(chan error)
	for range goroutines {
		go func() {
			var err error
			for range each {
				if err = addOnce(dir); err != nil {
					break
				}
			}
			done <- err
		}()
	}
	for range goroutines {
		if err := <-done; err != nil {
			t.Fatal(err)
		}
	}
	f := reopen(t, dir)
	if len(f.Takes()) != goroutines*each || len(f.Notices()) != 0 {
		t.Errorf("%d takes, notices %v", len(f.Takes()), f.Notices())
	}
}

func addOnce(dir string) error {
	r, err := rigOf(rigText)
	if err != nil {
		return err
	}
	for {
		f, err := OpenOrCreate(dir, r, usual)
		var held *BusyError
		if errors.As(err, &held) {
			time.Sleep(time.Millisecond)
			continue
		}
		if err != nil {
			return err
		}
		_, err = f.AddTake(near, "", recording(1, 10, false))
		return errors.Join(err, f.Close())
	}
}
