package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// laws are what each room may import of ours, tests left out; "" stands for the
// room's own name. A room that is not listed may not exist.
var laws = map[string][]string{
	"cmd/standoff":                      {"*"},
	"configs":                           {},
	"measure":                           {"measure/dsp"},
	"measure/dsp":                       {},
	"measure/wav":                       {},
	"measure/rig":                       {"measure"},
	"measure/session":                   {"measure", "measure/rig", "measure/wav"},
	"measure/audio":                     {"measure"},
	"measure/audio/audiotest":           {"measure", "measure/audio"},
	"measure/audio/bench":               {"measure", "measure/audio"},
	"measure/audio/portaudio":           {"measure", "measure/audio"},
	"measure/audio/replay":              {"measure", "measure/audio", "measure/wav"},
	"measure/audio/portaudio/jackbench": {"measure/wav"},
	"fit":                               {"measure", "fit/lsq"},
	"fit/lsq":                           {},
	"report":                            {"fit", "measure", "report/figure", "report/number"},
	"report/figure":                     {"fit", "measure", "report/number"},
	"report/number":                     {},
}

// The pure rooms know no files, devices or YAML.
var pure = []string{"fit", "fit/lsq", "report", "report/figure", "report/number", "measure", "measure/dsp"}

var impure = []string{"os", "os/exec", "net", "net/http", "gopkg.in/yaml.v3", "github.com/gordonklaus/portaudio"}

func TestImportLaws(t *testing.T) {
	seen := 0
	root := filepath.Join("..", "..")
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() && (strings.HasPrefix(d.Name(), ".") && path != root || d.Name() == "testdata" || d.Name() == "bin") {
			if path != root {
				return filepath.SkipDir
			}
		}
		if d.IsDir() || filepath.Ext(path) != ".go" || strings.HasSuffix(path, "_test.go") {
			return nil
		}
		seen++
		checkFile(t, root, path)
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if seen < 50 {
		t.Errorf("only %d files looked at", seen)
	}
}

func checkFile(t *testing.T, root, path string) {
	t.Helper()
	rel, _ := filepath.Rel(root, filepath.Dir(path))
	room := filepath.ToSlash(rel)
	allowed, known := laws[room]
	if !known {
		t.Errorf("%s: the house has no room %s", path, room)
		return
	}
	file, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
	if err != nil {
		t.Error(err)
		return
	}
	for _, spec := range file.Imports {
		name, _ := strconv.Unquote(spec.Path.Value)
		if slices.Contains(pure, room) && slices.Contains(impure, name) {
			t.Errorf("%s: %s may not import %s", path, room, name)
		}
		ours, is := strings.CutPrefix(name, "standoff/")
		if is && !slices.Contains(allowed, ours) && !slices.Contains(allowed, "*") {
			t.Errorf("%s: %s may not import %s", path, room, ours)
		}
	}
}
