package main

import (
	"context"
	"errors"
	"os"
	"os/exec"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"standoff": func() {
			os.Exit(run(context.Background(), os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
		},
	})
}

// exitsWith runs a command that has to end with a certain code.
func exitsWith(want int) func(*testscript.TestScript, bool, []string) {
	return func(ts *testscript.TestScript, neg bool, args []string) {
		if neg || len(args) == 0 {
			ts.Fatalf("exit%d takes a command and no !", want)
		}
		err := ts.Exec(args[0], args[1:]...)
		var ended *exec.ExitError
		if !errors.As(err, &ended) || ended.ExitCode() != want {
			ts.Fatalf("%s: %v, want exit %d", strings.Join(args, " "), err, want)
		}
	}
}

// The scripts use the command line as a person does.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir: "testdata/script",
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"exit1": exitsWith(1), "exit2": exitsWith(2), "exit3": exitsWith(3),
		},
		Setup: func(e *testscript.Env) error {
			e.Vars = append(e.Vars, "CONFIGS="+configsDir(t), "CI="+os.Getenv("CI"))
			return nil
		},
	})
}
