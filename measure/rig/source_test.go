package rig

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const withSource = `unit: {tag: RB-07}
audio: {}
distances: [30mm, 60mm]
source: {from: sources/small.yaml%s}
`

func loadWith(t *testing.T, block, more string) (*Rig, error) {
	t.Helper()
	dir := t.TempDir()
	if err := os.Mkdir(filepath.Join(dir, "sources"), 0o777); err != nil {
		t.Fatal(err)
	}
	if block != "" {
		if err := os.WriteFile(filepath.Join(dir, "sources", "small.yaml"), []byte(block), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	path := filepath.Join(dir, "rig.yaml")
	if err := os.WriteFile(path, []byte(strings.Replace(withSource, "%s", more, 1)), 0o666); err != nil {
		t.Fatal(err)
	}
	return Load(path)
}

func TestSourceFromAFile(t *testing.T) {
	const block = "# measured\nkind: piston\nradius: 16.9mm\nradius_uncertainty: 0.3mm\ncentre: -1.2mm\ncentre_uncertainty: 0.9mm\npolarity: normal\n"
	r, err := loadWith(t, block, "")
	if err != nil {
		t.Fatal(err)
	}
	want := Source{Kind: "piston", Radius: 0.0169, RadiusUncertainty: 0.0003, Centre: -0.0012, CentreUncertainty: 0.0009, Polarity: "normal", From: "sources/small.yaml"}
	got := r.Source
	if string(got.Raw) != block {
		t.Errorf("the file is kept as %q", got.Raw)
	}
	if got.Raw = nil; got.Kind != want.Kind || got.Radius != want.Radius || got.RadiusUncertainty != want.RadiusUncertainty || got.Centre != want.Centre ||
		got.CentreUncertainty != want.CentreUncertainty || got.Polarity != want.Polarity || got.From != want.From {
		t.Errorf("got %+v, want %+v", got, want)
	}
	other, err := loadWith(t, block, ", polarity: reversed")
	if err != nil || other.Source.Polarity != "reversed" {
		t.Errorf("a rig's own polarity: %+v, %v", other, err)
	}
	if changed, err := loadWith(t, strings.Replace(block, "16.9", "17.1", 1), ""); err != nil || changed.Hash() == r.Hash() {
		t.Errorf("another source leaves the hash as it is: %v", err)
	}
}

func TestBadSourceFiles(t *testing.T) {
	const good = "radius: 17mm\nradius_uncertainty: 0.3mm\n"
	for _, c := range []struct{ block, more, want, hint string }{
		{"", "", "rig.yaml:4: source.from: cannot read", "standoff source writes such a file"},
		{good, ", radius: 12mm", "rig.yaml:4: source.radius: stands in sources/small.yaml already", "remove it here"},
		{good, ", kind: point", "rig.yaml:4: source.kind: stands in", "remove it here"},
		{"radius: 17mm\n", "", "small.yaml:1: radius_uncertainty: is required", "radius_uncertainty: 0.5mm"},
		{"radius: 17\nradius_uncertainty: 0.3mm\n", "", "small.yaml:1: radius: 17 has no unit", "17mm"},
		{good + "diameter: 34mm\n", "", "small.yaml:3: diameter:", ""},
		{good + "from: other.yaml\n", "", "small.yaml:3: from:", ""},
		{"- 17mm\n", "", "small.yaml:1:", ""},
		{good + "\tcentre: 1mm\n", "", "small.yaml:3:", "spaces"},
	} {
		_, err := loadWith(t, c.block, c.more)
		if err == nil {
			t.Errorf("%q %q: no error", c.block, c.more)
			continue
		}
		if !strings.Contains(err.Error(), c.want) || !strings.Contains(Hint(err), c.hint) {
			t.Errorf("%q %q: %v (%s), want %s (%s)", c.block, c.more, err, Hint(err), c.want, c.hint)
		}
	}
}
