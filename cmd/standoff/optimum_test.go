//go:build linux

package main

import (
	"encoding/json"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"standoff/fit"
)

// exported is a dataset for testdata/reference/fit/session.py.
type exported struct {
	Form     string    `json:"form"`
	Body     string    `json:"body"`
	Hz       []float64 `json:"hz"`
	Setback  float64   `json:"setback_m"`
	SetbackU float64   `json:"setback_u_m"`
	Radius   float64   `json:"radius_m"`
	RadiusU  float64   `json:"radius_u_m"`
	Speed    float64   `json:"speed_m_s"`
	SpeedU   float64   `json:"speed_u_m_s"`
	Points   []struct {
		Nominal  float64   `json:"nominal_m"`
		Tape     float64   `json:"tape_u_m"`
		Re       []float64 `json:"re"`
		Im       []float64 `json:"im"`
		Variance []float64 `json:"variance"`
	} `json:"points"`
}

func export(d *fit.Dataset, m fit.Model) (out exported) {
	out = exported{Form: m.Form, Body: m.Body, Hz: d.Hz, Setback: d.Setback, SetbackU: d.SetbackUncertainty,
		Radius: d.Radius, RadiusU: d.RadiusUncertainty, Speed: d.Speed, SpeedU: d.SpeedUncertainty}
	for i, p := range d.Points {
		out.Points = append(out.Points, struct {
			Nominal  float64   `json:"nominal_m"`
			Tape     float64   `json:"tape_u_m"`
			Re       []float64 `json:"re"`
			Im       []float64 `json:"im"`
			Variance []float64 `json:"variance"`
		}{Nominal: p.Nominal, Tape: p.Tape, Variance: d.Variances(i)})
		q := &out.Points[i]
		for _, v := range p.Value {
			q.Re, q.Im = append(q.Re, real(v)), append(q.Im, imag(v))
		}
	}
	return out
}

// Two solvers, one problem: on the spectra of a whole session scipy's least_squares,
// with models of its own and the far response as parameters, ends where ours does, to
// 1e−6 of each value.
func TestOptimumAgainstScipy(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	if testing.Short() {
		t.Skip("takes some seconds")
	}
	py := python(t)
	dir := t.TempDir()
	a := measured(t, worlds[0].meet(t, 9), filepath.Join(dir, "s"))
	best := a.fit.Best()
	raw, err := json.Marshal(export(a.fit.Data, best.Model))
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(dir, "exported.json")
	if err := os.WriteFile(path, raw, 0o666); err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(py, filepath.Join("..", "..", "testdata", "reference", "fit", "session.py"), path)
	cmd.Env = append(os.Environ(), "PYTHONDONTWRITEBYTECODE=1")
	cmd.Stderr = os.Stderr
	text, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	var theirs map[string]float64
	if err := json.Unmarshal(text, &theirs); err != nil {
		t.Fatal(err)
	}
	if off := best.Misfit()/(2*theirs["cost"]) - 1; off > 1e-8 {
		t.Errorf("our misfit is larger by %.1e of itself", off)
	}
	for name, got := range map[string]float64{"beta": best.Acoustics.Beta, "spacing": best.Acoustics.Spacing, "setback": best.Setback,
		"radius": best.Acoustics.Radius, "speed": best.Acoustics.Speed} {
		t.Logf("%s: %.9g, scipy %.9g", name, got, theirs[name])
		if math.Abs(got/theirs[name]-1) > 1e-6 {
			t.Errorf("%s: %.9g, scipy %.9g", name, got, theirs[name])
		}
	}
}
