package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"strings"
	"syscall"

	"github.com/alecthomas/kong"
)

// version of the program, in every manifest, result and report.
const version = "0.1.0"

// cli is the command line.
type cli struct {
	Quiet   bool        `short:"q" help:"Say nothing but results and errors."`
	Version versionFlag `help:"Print the version and leave."`

	New     newCmd     `cmd:"" help:"Write a commented rig to start from."`
	Devices devicesCmd `cmd:"" help:"List the audio devices by the names that a rig uses."`
	Plan    planCmd    `cmd:"" help:"Tell what a list of distances will hold, before anybody measures."`
	Sweep   sweepCmd   `cmd:"" help:"Write the sweep as a WAV, to be played by anything."`
	Run     runCmd     `cmd:"" help:"Measure one microphone: guided takes, then fit and report."`
	Import  importCmd  `cmd:"" help:"Make a session of recordings made elsewhere, then fit and report."`
	Source  sourceCmd  `cmd:"" help:"Measure the loudspeaker itself, from a session with a pressure microphone."`
	Fit     fitCmd     `cmd:"" help:"Analyse sessions again."`
	Report  reportCmd  `cmd:"" help:"Write the report of sessions again."`
	Demo    demoCmd    `cmd:"" help:"Do the whole job on the virtual bench, without hardware."`
}

type versionFlag bool

func (versionFlag) BeforeReset(k *kong.Kong) error {
	fmt.Fprintln(k.Stdout, "standoff "+version)
	k.Exit(0)
	return nil
}

// about is the first paragraph of the help.
const about = "Measures how a microphone behaves near a source: the mix of gradient and pressure in its capsule and its port spacing, " +
	"each with its uncertainty, from sweeps played by a small loudspeaker at a list of distances."

// env is what a command works with.
type env struct {
	ctx context.Context
	in  io.Reader
	*voice
}

// leave carries an exit code out of the parser.
type leave int

// run is the program: arguments in, exit code out.
func run(ctx context.Context, args []string, in io.Reader, out, errOut io.Writer) (code int) {
	defer func() {
		if p := recover(); p != nil {
			l, ok := p.(leave)
			if !ok {
				panic(p)
			}
			code = int(l)
		}
	}()
	ctx, stop := signal.NotifyContext(ctx, os.Interrupt, syscall.SIGTERM)
	defer stop()
	var c cli
	v := newVoice(out, errOut)
	parser, err := kong.New(&c, kong.Name("standoff"), kong.Description(about), kong.Writers(out, errOut),
		kong.Exit(func(code int) { panic(leave(code)) }), kong.ConfigureHelp(kong.HelpOptions{Compact: true, WrapUpperBound: 88}))
	if err != nil {
		return v.fail(err)
	}
	if len(args) == 0 {
		args = []string{"--help"}
	}
	k, err := parser.Parse(args)
	if err != nil {
		return v.fail(usage(err, "see: standoff "+named(args)+"--help"))
	}
	v.quiet = c.Quiet
	return v.fail(interrupted(ctx, k.Run(&env{ctx: ctx, in: in, voice: v})))
}

// named is the command among the arguments, with a space, for a hint.
func named(args []string) string {
	if len(args) > 0 && !strings.HasPrefix(args[0], "-") {
		for _, known := range []string{"new", "devices", "plan", "sweep", "run", "import", "source", "fit", "report", "demo"} {
			if args[0] == known {
				return known + " "
			}
		}
	}
	return ""
}

// interrupted says of any failure after an interrupt that it was that.
func interrupted(ctx context.Context, err error) error {
	if err != nil && ctx.Err() != nil && !errors.Is(err, context.Canceled) {
		return fmt.Errorf("%w: %w", context.Canceled, err)
	}
	return err
}

// exits is the last part of every help page.
func exits(lines ...string) string {
	return "\n\nExit codes:\n\n  0    done\n  1    failed\n  2    wrong usage or rig\n" + strings.Join(lines, "") + "  130  interrupted\n"
}

const (
	exitsLook = "  3    done, but something needs a look: a take was rejected, or a value is not resolved\n"
)
