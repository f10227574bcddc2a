package rig

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"os"
	"path/filepath"

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

// Parse checks a rig that has been read. The path is only named, in messages and in
// the result, and is where source.from starts from. The error, if any, is of type
// Errors.
func Parse(path string, raw []byte) (*Rig, error) {
	return ParseWith(path, raw, func(name string) (string, []byte, error) { return beside(path, name) })
}

// ParseWith is Parse with a reader of its own for the file that source.from names: it
// returns the file's path, for messages, and what is in it.
func ParseWith(path string, raw []byte, include func(name string) (string, []byte, error)) (*Rig, error) {
	f := &file{name: path, found: map[string]*yaml.Node{}, include: include}
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

// beside reads a file that a rig names, from where the rig is.
func beside(path, name string) (string, []byte, error) {
	if !filepath.IsAbs(name) {
		name = filepath.Join(filepath.Dir(path), name)
	}
	f, err := os.Open(name)
	if err != nil {
		return name, nil, err
	}
	defer f.Close()
	raw, err := io.ReadAll(io.LimitReader(f, MaxBytes+1))
	return name, raw, err
}

// Hash is the SHA-256 of the file, and of the source's file where it names one, in
// hexadecimal.
func (r *Rig) Hash() string {
	h := sha256.New()
	h.Write(r.Raw)
	h.Write(r.Source.Raw)
	return hex.EncodeToString(h.Sum(nil))
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
