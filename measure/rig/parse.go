package rig

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"os"

	"gopkg.in/yaml.v3"
)

// Load reads and checks a rig. What is wrong inside the file is returned as
// Errors; a file that cannot be read, as an error of package os.
func Load(path string) (*Rig, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("cannot read the rig: %w", err)
	}
	defer f.Close()
	raw, err := io.ReadAll(io.LimitReader(f, MaxBytes+1))
	if err != nil {
		return nil, fmt.Errorf("cannot read the rig: %w", err)
	}
	return Parse(path, raw)
}

// Parse checks a rig that has been read. The path is only named, in messages
// and in the result. The error, if any, is of type Errors.
func Parse(path string, raw []byte) (*Rig, error) {
	f := &file{name: path, found: map[string]*yaml.Node{}}
	root := f.document(raw)
	if root == nil {
		return nil, f.errs.inOrder()
	}
	r := f.read(root)
	if len(f.errs) > 0 {
		return nil, f.errs.inOrder()
	}
	r.Path, r.Raw = path, raw
	return r, nil
}

// Hash is the SHA-256 of the file, in hexadecimal.
func (r *Rig) Hash() string {
	sum := sha256.Sum256(r.Raw)
	return hex.EncodeToString(sum[:])
}

// read goes through the sections, then compares what stands in several of them.
func (f *file) read(root *yaml.Node) *Rig {
	m := f.mapping(root, "", root.Line)
	if m.state == broken {
		return nil
	}
	defer m.close()
	m.require("audio", "{backend: portaudio}")
	m.require("distances", "[30mm, 60mm, 120mm, 240mm]")
	r := &Rig{
		Unit:                readUnit(m.section("unit")),
		Capsule:             readCapsule(m.section("capsule")),
		Source:              readSource(m.section("source")),
		Air:                 readAir(m.section("air")),
		Sweep:               readSweep(m.section("sweep")),
		Audio:               readAudio(m.section("audio")),
		Distances:           readDistances(m),
		DistanceUncertainty: m.quantity("distance_uncertainty", length, "0.5mm", "0.01mm", "1m"),
		Fit:                 readFit(m.section("fit")),
		Mover:               readMover(m.section("mover")),
	}
	r.Virtual = readVirtual(m.section("virtual"), r)
	f.checkSetback(r)
	f.checkBands(r)
	f.checkChannels(r)
	return r
}
