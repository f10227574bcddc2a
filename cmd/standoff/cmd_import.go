package main

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"standoff/measure"
	"standoff/measure/audio/replay"
	"standoff/measure/rig"
	"standoff/measure/session"
)

type importCmd struct {
	Rig    string   `arg:"" help:"The rig: its distances, source and sweep."`
	Take   []string `required:"" sep:"none" placeholder:"DISTANCE=FILE.wav" help:"A recording and where it was made; as often as there are takes."`
	Into   string   `required:"" placeholder:"DIR" help:"The session folder."`
	Sweep  string   `placeholder:"FILE.wav" help:"What was played, where it was not the rig's own sweep."`
	Tag    string   `help:"The unit's tag, instead of the rig's."`
	Serial string   `help:"The unit's serial, instead of the rig's."`
	JSON   bool     `help:"Print the result as JSON."`
}

func (importCmd) Help() string {
	return `Copies recordings into a session folder and does everything that a measurement does afterwards. A file that the folder has already is not taken twice. The microphone is in audio.input_channel, an electrical loopback in audio.loopback_channel.

Example:

  standoff import rig.yaml --take 30mm=a.wav --take 60mm=b.wav --take 250mm=c.wav --into RB-07` + exits(exitsLook)
}

// placedFile is one --take.
type placedFile struct {
	distance measure.Distance
	path     string
}

func (c *importCmd) Run(e *env) error {
	r, err := rig.Load(c.Rig)
	if err != nil {
		return err
	}
	files, err := c.files(r)
	if err != nil {
		return err
	}
	if err := c.check(r, files); err != nil {
		return err
	}
	f, err := session.OpenOrCreate(c.Into, r, session.Options{Version: version, Tag: c.Tag, Serial: c.Serial, Recorder: "recordings made elsewhere"})
	if err != nil {
		return err
	}
	defer f.Close()
	e.notices(f)
	if err := c.excitation(r, f); err != nil {
		return err
	}
	if err := e.adopt(f, r, files); err != nil {
		return err
	}
	e.say("analysing %s", takesText(len(f.Takes())))
	a, err := analyse(e.ctx, f, version)
	if err != nil {
		return err
	}
	if err := a.publish(version); err != nil {
		return err
	}
	if err := e.show([]*analysed{a}, c.JSON); err != nil {
		return err
	}
	return look([]*analysed{a})
}

// files reads the --take flags.
func (c *importCmd) files(r *rig.Rig) ([]placedFile, error) {
	var out []placedFile
	for _, t := range c.Take {
		label, path, ok := strings.Cut(t, "=")
		if !ok || label == "" || path == "" {
			return nil, usage(fmt.Errorf("--take %s: a take is DISTANCE=FILE.wav", t), "such as --take 30mm=near.wav")
		}
		d, ok := placeOf(r, label)
		if !ok {
			return nil, usage(fmt.Errorf("--take %s: %s is not on the list of %s", t, label, r.Path), "the list: "+labels(r.Distances))
		}
		out = append(out, placedFile{d, path})
	}
	return out, nil
}

// placeOf finds a distance by its label, or by its length in other words.
func placeOf(r *rig.Rig, label string) (measure.Distance, bool) {
	i := slices.IndexFunc(r.Distances, func(d measure.Distance) bool { return d.Label == label })
	if metres, err := rig.Length(label); i < 0 && err == nil {
		i = slices.IndexFunc(r.Distances, func(d measure.Distance) bool { return math.Abs(d.Metres-metres) < 1e-6 })
	}
	if i < 0 {
		return measure.Distance{}, false
	}
	return r.Distances[i], true
}

// check reads all files before anything is written, one at a time: a recording may be
// minutes long.
func (c *importCmd) check(r *rig.Rig, files []placedFile) error {
	for _, f := range files {
		rec, err := loadFile(r, f)
		if err != nil {
			return err
		}
		if err := rateServes(f.path, rec.SampleRate, r.Fit.To); err != nil {
			return err
		}
	}
	return nil
}

func loadFile(r *rig.Rig, f placedFile) (*measure.Recording, error) {
	return replay.Load(f.path, r.Audio.InputChannel, r.Audio.LoopbackChannel)
}

// excitation keeps a sweep of the user's own in the folder.
func (c *importCmd) excitation(r *rig.Rig, f *session.Folder) error {
	if c.Sweep == "" {
		return nil
	}
	rec, err := replay.Load(c.Sweep, 1, 0)
	if err != nil {
		return err
	}
	if rec.SampleRate != r.Audio.SampleRate {
		return cure(fmt.Errorf("%s: %d Hz, but the rig's audio.sample_rate is %d Hz", c.Sweep, rec.SampleRate, r.Audio.SampleRate),
			"play and record at one rate, and say it in the rig")
	}
	if _, err := measure.SampledExcitation(rec.Mic, rec.SampleRate); err != nil {
		return fmt.Errorf("%s: %w", c.Sweep, err)
	}
	return f.SetExcitation(rec.Mic, rec.SampleRate)
}

// adopt copies recordings into the folder, except those that are there.
func (e *env) adopt(f *session.Folder, r *rig.Rig, files []placedFile) error {
	for _, file := range files {
		name := filepath.Base(file.path)
		rec, err := loadFile(r, file)
		if err != nil {
			return err
		}
		known, err := alreadyThere(f, file.distance, rec)
		if err != nil {
			return err
		}
		if known {
			e.say("%s: %s is already there", file.distance.Label, name)
			continue
		}
		take, err := f.AddTake(file.distance, name, rec)
		if err != nil {
			return err
		}
		e.say("%s: %s becomes %s", file.distance.Label, name, take.File)
	}
	return nil
}

func alreadyThere(f *session.Folder, d measure.Distance, rec *measure.Recording) (bool, error) {
	for _, t := range f.Takes() {
		if t.Distance != d.Label || t.SampleRate != rec.SampleRate {
			continue
		}
		old, err := f.Load(t)
		if err != nil {
			return false, err
		}
		if slices.Equal(old.Mic, rec.Mic) && slices.Equal(old.Loopback, rec.Loopback) {
			return true, nil
		}
	}
	return false, nil
}
