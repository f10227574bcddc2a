package rig

import "gopkg.in/yaml.v3"

// readForTest reads a rig and returns the reader, which knows the keys it asked
// for.
func readForTest(raw []byte) *file {
	f := &file{name: "rig.yaml", found: map[string]*yaml.Node{}}
	if root := f.document(raw); root != nil {
		f.read(root)
	}
	return f
}
