package rig

import (
	_ "embed"
	"slices"
)

//go:embed starter.yaml
var starter []byte

// Starter is a commented rig for a real bench to start from: every key with its
// unit, its default and what it means. Keys without which a rig is complete are
// commented out.
func Starter() []byte { return slices.Clone(starter) }
