package rig

import (
	"fmt"

	"gopkg.in/yaml.v3"
)

// mostDepth is more than any rig needs.
const mostDepth = 16

// inspect walks through all nodes and refuses what a rig does without. An alias
// can make a small file as large as a house, and a rig has no use for one.
func (f *file) inspect(n *yaml.Node, path string, depth int) {
	switch {
	case depth > mostDepth:
		f.fail(n.Line, "", fmt.Sprintf("more than %d levels in one another", mostDepth), "close the brackets, or indent less")
		return
	case n.Kind == yaml.AliasNode:
		f.fail(n.Line, path, "aliases (*"+show(n.Value)+") are not used in a rig", "write the value itself")
		return
	case n.Anchor != "":
		f.fail(n.Line, path, "anchors (&"+show(n.Anchor)+") are not used in a rig", "remove it")
	case n.Style&yaml.TaggedStyle != 0:
		f.fail(n.Line, path, "tags ("+show(n.Tag)+") are not used in a rig", "remove it")
	}
	switch n.Kind {
	case yaml.MappingNode:
		f.inspectMapping(n, path, depth+1)
	case yaml.SequenceNode:
		for i, entry := range n.Content {
			f.inspect(entry, index(path, i), depth+1)
		}
	}
}

func (f *file) inspectMapping(n *yaml.Node, path string, depth int) {
	first := map[string]int{}
	for i := 0; i+1 < len(n.Content); i += 2 {
		key, value := n.Content[i], n.Content[i+1]
		here := join(path, key.Value)
		switch line, twice := first[key.Value]; {
		case key.Kind != yaml.ScalarNode:
			f.fail(key.Line, path, "a key is not a plain word", "write key: value")
			continue
		case key.Tag == "!!merge":
			f.fail(key.Line, path, "merge keys (<<) are not used in a rig", "write the keys themselves")
			continue
		case key.Anchor != "" || key.Style&yaml.TaggedStyle != 0:
			f.fail(key.Line, here, "anchors and tags are not used in a rig", "remove it")
		case twice:
			f.fail(key.Line, here, fmt.Sprintf("duplicate key, first in line %d", line), "remove one of them")
		}
		first[key.Value] = key.Line
		f.inspect(value, here, depth)
	}
}

// join is the path of a key in the mapping at path.
func join(path, key string) string {
	if path == "" {
		return show(key)
	}
	return path + "." + show(key)
}

// index is the path of entry i, from 0, of the list at path.
func index(path string, i int) string { return fmt.Sprintf("%s[%d]", path, i) }
