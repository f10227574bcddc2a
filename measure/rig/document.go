package rig

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"regexp"
	"strconv"
	"strings"
	"unicode/utf8"

	"gopkg.in/yaml.v3"
)

// MaxBytes is the most that a rig may have; a long one has some 5000.
const MaxBytes = 1 << 20

// document is the one YAML document of a file as nodes, free of everything that
// a rig does without: anchors, aliases, merge keys, tags, a second document.
func (f *file) document(raw []byte) *yaml.Node {
	f.checkBytes(raw)
	if len(f.errs) > 0 {
		return nil
	}
	root := f.scan(raw)
	if root == nil {
		return nil
	}
	f.inspect(root, "", 0)
	if len(f.errs) > 0 {
		return nil
	}
	return root
}

// checkBytes finds what YAML itself would report without a line or a cure.
func (f *file) checkBytes(raw []byte) {
	switch {
	case len(raw) > MaxBytes:
		f.fail(1, "", fmt.Sprintf("the file has more than %d bytes", MaxBytes), "is it a rig at all?")
	case bytes.HasPrefix(raw, []byte{0xff, 0xfe}), bytes.HasPrefix(raw, []byte{0xfe, 0xff}):
		f.fail(1, "", "the file is UTF-16", "save it as UTF-8")
	default:
		for i, line := range bytes.Split(raw, []byte("\n")) {
			f.checkLine(i+1, line)
		}
	}
}

func (f *file) checkLine(number int, line []byte) {
	text := bytes.TrimRight(line, " \t\r")
	indent := text[:len(text)-len(bytes.TrimLeft(text, " \t"))]
	switch control := bytes.IndexFunc(text, func(r rune) bool { return r < ' ' && r != '\t' || r == 0x7f }); {
	case !utf8.Valid(text):
		f.fail(number, "", "the text is not UTF-8", "save the file as UTF-8")
	case control >= 0:
		f.fail(number, "", fmt.Sprintf("control character %#02x", text[control]), "remove it")
	case bytes.ContainsRune(indent, '\t'):
		f.fail(number, "", "a tab indents this line", "indent with spaces")
	}
}

// scan reads the nodes. Nodes of aliases are not expanded here, so nothing grows.
func (f *file) scan(raw []byte) *yaml.Node {
	decoder := yaml.NewDecoder(bytes.NewReader(raw))
	first, err := next(decoder)
	if errors.Is(err, io.EOF) || err == nil && first.Content[0].Tag == "!!null" {
		f.fail(1, "", "the file is empty", "standoff new writes a rig to start from")
		return nil
	}
	var second *yaml.Node
	if err == nil {
		second, err = next(decoder)
	}
	switch {
	case err == nil:
		f.fail(second.Line, "", "a second YAML document begins here", "remove the line with ---")
		return nil
	case !errors.Is(err, io.EOF):
		f.failYAML(err, raw)
		return nil
	}
	return first.Content[0]
}

// next is the next document, with one node of content. The YAML package is known
// to panic on some broken files; to a caller these are broken files like others.
func next(decoder *yaml.Decoder) (document *yaml.Node, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("yaml: %v", r)
		}
	}()
	document = &yaml.Node{}
	if err := decoder.Decode(document); err != nil {
		return nil, err
	}
	if len(document.Content) != 1 {
		return nil, io.EOF
	}
	return document, nil
}

var (
	yamlLine    = regexp.MustCompile(`^yaml: (?:line (\d+): )?((?s).*)$`)
	yamlBreak   = regexp.MustCompile("\r\n|[\n\r\u0085\u2028\u2029]")
	yamlUnknown = regexp.MustCompile(`^unknown anchor '(.*)' referenced`)
)

// cures of what the YAML package says, by a part of it.
var cures = []struct{ part, cure string }{
	{"',' or ']'", "close the list with ]"},
	{"',' or '}'", "close the block with }"},
	{"expected key", "keys of one block begin in one column"},
	{"'-' indicator", "entries of one list begin in one column, with a dash"},
	{"mapping values are not allowed", "indent keys of one block alike, and quote a value with a colon in it"},
	{"cannot start any token", "quote a value that begins with @, % or a backtick"},
	{"expected ':'", "write key: value, with a space after the colon"},
	{"unexpected end of stream", "close the quotation mark"},
	{"tab character", "indent with spaces"},
}

// failYAML rewrites an error of the YAML package, which counts the lines of its
// parser's errors (not of its scanner's) from nought, and leaves nought out.
func (f *file) failYAML(err error, raw []byte) {
	parts := yamlLine.FindStringSubmatch(err.Error())
	if parts == nil {
		f.fail(1, "", "not valid YAML: "+show(err.Error()), "")
		return
	}
	if anchor := yamlUnknown.FindStringSubmatch(parts[2]); anchor != nil {
		before, _, _ := bytes.Cut(raw, []byte("*"+anchor[1]))
		f.fail(1+bytes.Count(before, []byte("\n")), "", "aliases (*"+show(anchor[1])+") are not used in a rig", "write the value itself")
		return
	}
	line, _ := strconv.Atoi(parts[1])
	if line == 0 || strings.HasPrefix(parts[2], "did not find expected") {
		line++
	}
	line = min(line, len(yamlBreak.Split(strings.TrimRight(string(raw), "\r\n"), -1)))
	message := strings.ReplaceAll(parts[2], "\n", " ")
	for _, c := range cures {
		if strings.Contains(message, c.part) {
			f.fail(line, "", "not valid YAML: "+message, c.cure)
			return
		}
	}
	f.fail(line, "", "not valid YAML: "+message, "")
}
