package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"standoff/measure"
	"standoff/measure/rig"
)

// stand brings the microphone to a distance: a person, a motorised slide, or
// nobody at all. skip true leaves the distance out.
type stand interface {
	place(ctx context.Context, d measure.Distance, index, of int) (skip bool, err error)
}

// standOf is the stand that rig and flags ask for.
func standOf(e *env, c *runCmd, r *rig.Rig) stand {
	switch {
	case r.Mover != nil:
		return &slide{e: e, mover: r.Mover, beside: filepath.Dir(r.Path)}
	case r.Audio.Backend == "virtual" || c.Yes && c.Countdown == 0:
		return atOnce{}
	case c.Countdown > 0:
		return &waiting{e: e, time: c.Countdown}
	}
	return &person{e: e, lines: readLines(e.in)}
}

type atOnce struct{}

func (atOnce) place(context.Context, measure.Distance, int, int) (bool, error) { return false, nil }

// waiting counts down, for a person without a free hand.
type waiting struct {
	e    *env
	time time.Duration
}

func (w *waiting) place(ctx context.Context, d measure.Distance, index, of int) (bool, error) {
	w.e.say("%s (%d of %d): put the microphone there, the sweep starts in %v", w.e.strong(d.Label), index, of, w.time)
	for left := w.time; left > 0; left -= time.Second {
		w.e.redraw(fmt.Sprintf("%s in %v", d.Label, left.Round(time.Second)))
		if err := pause(ctx, min(left, time.Second)); err != nil {
			return false, err
		}
	}
	return false, nil
}

func pause(ctx context.Context, d time.Duration) error {
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-t.C:
		return nil
	case <-ctx.Done():
		return ctx.Err()
	}
}

// person is asked at every distance.
type person struct {
	e     *env
	lines <-chan string
}

func (p *person) place(ctx context.Context, d measure.Distance, index, of int) (bool, error) {
	p.e.clear()
	fmt.Fprintf(p.e.err, "%s (%d of %d): put the microphone there, then Enter (s skip, q stop here) ", p.e.strong(d.Label), index, of)
	for {
		select {
		case <-ctx.Done():
			return false, ctx.Err()
		case line, open := <-p.lines:
			if !open {
				return false, cure(fmt.Errorf("no answer at %s: the input has ended", d.Label), "without a keyboard use --yes, --countdown or a mover")
			}
			switch strings.ToLower(strings.TrimSpace(line)) {
			case "":
				return false, nil
			case "s":
				return true, nil
			case "q":
				return false, errStopped
			}
			fmt.Fprint(p.e.err, "Enter measures, s skips, q stops here ")
		}
	}
}

// readLines reads in the background, so that waiting for a key can be broken off.
func readLines(in io.Reader) <-chan string {
	out := make(chan string)
	go func() {
		defer close(out)
		if in == nil {
			return
		}
		s := bufio.NewScanner(in)
		for s.Scan() {
			out <- s.Text()
		}
	}()
	return out
}

// slide is the rig's mover: a program, run directly.
type slide struct {
	e      *env
	mover  *rig.Mover
	beside string // folder of the rig
}

// moveTime is how long a mover may take.
const moveTime = 2 * time.Minute

func (s *slide) place(ctx context.Context, d measure.Distance, index, of int) (bool, error) {
	s.e.say("%s (%d of %d): moving", s.e.strong(d.Label), index, of)
	limited, cancel := context.WithTimeout(ctx, moveTime)
	defer cancel()
	args := s.arguments(d, index)
	cmd := exec.CommandContext(limited, args[0], args[1:]...)
	cmd.WaitDelay = time.Second
	said, err := cmd.CombinedOutput()
	if ctx.Err() != nil {
		return false, ctx.Err()
	}
	if err != nil {
		reason := lastLine(string(said))
		if errors.Is(limited.Err(), context.DeadlineExceeded) {
			reason = fmt.Sprintf("no end after %v", moveTime)
		}
		return false, cure(fmt.Errorf("mover.command at %s: %w %s", d.Label, err, reason), "try it by hand: "+strings.Join(args, " "))
	}
	return false, pause(ctx, time.Duration(s.mover.Settle*float64(time.Second)))
}

func (s *slide) arguments(d measure.Distance, index int) []string {
	replace := strings.NewReplacer("{distance_mm}", strconv.FormatFloat(roundTo(1e3*d.Metres, 1e-3), 'f', -1, 64),
		"{distance_label}", d.Label, "{index}", strconv.Itoa(index))
	args := make([]string, len(s.mover.Command))
	for i, a := range s.mover.Command {
		args[i] = replace.Replace(a)
	}
	// A path that is not there from where we are may be meant beside the rig.
	if strings.ContainsRune(args[0], filepath.Separator) && !filepath.IsAbs(args[0]) {
		if _, err := os.Stat(args[0]); err != nil {
			if there := filepath.Join(s.beside, args[0]); isFile(there) {
				args[0] = there
			}
		}
	}
	return args
}

func isFile(path string) bool {
	info, err := os.Stat(path)
	return err == nil && info.Mode().IsRegular()
}

func roundTo(x, step float64) float64 { return float64(int64(x/step+0.5)) * step }

func lastLine(s string) string {
	lines := strings.Split(strings.TrimSpace(s), "\n")
	return lines[len(lines)-1]
}
