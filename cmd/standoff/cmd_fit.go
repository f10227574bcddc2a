package main

import (
	"errors"
	"fmt"

	"standoff/fit"
	"standoff/measure/session"

	"golang.org/x/sync/errgroup"
)

type fitCmd struct {
	Dirs []string `arg:"" name:"dir" help:"Session folders."`
	JSON bool     `help:"Print the results as JSON: one object, or an array for several folders."`
}

func (fitCmd) Help() string {
	return `Analyses sessions again, from their recordings and the rig.yaml in the folder, and writes result.json, responses and report anew. Several folders are done in parallel.

Example:

  standoff fit RB-07 SC-12` + exits(exitsLook)
}

func (c *fitCmd) Run(e *env) error { return e.again(c.Dirs, c.JSON, (*analysed).publish) }

type reportCmd struct {
	Dirs []string `arg:"" name:"dir" help:"Session folders."`
	JSON bool     `help:"Print the results as JSON."`
}

func (reportCmd) Help() string {
	return `Writes report.pdf, plots and responses.csv again, from the recordings in the folder.

Example:

  standoff report RB-07` + exits(exitsLook)
}

func (c *reportCmd) Run(e *env) error { return e.again(c.Dirs, c.JSON, (*analysed).writePages) }

// again analyses folders and writes what follows from them. One that fails does
// not keep the others from being done.
func (e *env) again(dirs []string, asJSON bool, write func(*analysed, string) error) error {
	results := make([]*analysed, len(dirs))
	errs := make([]error, len(dirs))
	var g errgroup.Group
	g.SetLimit(workers())
	for i, dir := range dirs {
		g.Go(func() error {
			results[i], errs[i] = e.one(dir, write)
			return nil
		})
	}
	g.Wait()
	if err := e.show(results, asJSON); err != nil {
		return err
	}
	if err := errors.Join(errs...); err != nil {
		return err
	}
	return look(results)
}

func (e *env) one(dir string, write func(*analysed, string) error) (*analysed, error) {
	f, err := session.Open(dir)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	e.notices(f)
	e.say("%s: analysing %s", dir, takesText(len(f.Takes())))
	a, err := analyse(e.ctx, f, version)
	if err != nil {
		return nil, err
	}
	if err := write(a, version); err != nil {
		return nil, fmt.Errorf("%s: %w", dir, err)
	}
	return a, nil
}

func takesText(n int) string {
	if n == 1 {
		return "1 take"
	}
	return fmt.Sprintf("%d takes", n)
}

func (e *env) notices(f *session.Folder) {
	for _, n := range f.Notices() {
		e.say("note: %s", n.Text)
		if n.Hint != "" {
			e.say("      %s", n.Hint)
		}
	}
}

// show prints results, in the order asked for.
func (e *env) show(results []*analysed, asJSON bool) error {
	var good []*fit.Result
	for _, a := range results {
		if a == nil {
			continue
		}
		good = append(good, a.result)
		if !asJSON {
			e.summary(a)
		}
	}
	switch {
	case !asJSON || len(good) == 0:
		return nil
	case len(results) == 1:
		return e.json(good[0])
	}
	return e.json(good)
}

func look(results []*analysed) error {
	for _, a := range results {
		if a != nil && needsALook(a.result) {
			return errLook
		}
	}
	return nil
}
