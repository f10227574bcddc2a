package session

import (
	"fmt"
	"io"
	"path"
	"slices"
	"strings"
)

// WriteFile replaces a derived file as a whole, or leaves it as it was. The name
// is slash-separated and relative; what was recorded cannot be written this way.
func (f *Folder) WriteFile(rel string, write func(io.Writer) error) error {
	if err := checkDerived(rel); err != nil {
		return err
	}
	if dir := path.Dir(rel); dir != "." {
		if err := f.disk.Mkdir(dir); err != nil {
			return cannot("make", f.Path(dir), err)
		}
	}
	if _, _, err := place(f.disk, rel, false, write); err != nil {
		return cannot("write", f.Path(rel), err)
	}
	return nil
}

// checkDerived keeps to names that mean the same on every system: some compare
// without regard to case and drop dots and spaces at the end.
func checkDerived(rel string) error {
	parts := strings.Split(rel, "/")
	for _, p := range parts {
		if p == "" || strings.HasPrefix(p, ".") || strings.TrimRight(p, ". ") != p || strings.ContainsAny(p, "\\:\x00") {
			return fmt.Errorf("%q is not a name inside a session folder", rel)
		}
	}
	recorded := []string{takesDir, rigName, sourceName, manifestName, excitationName}
	if slices.Contains(recorded, strings.ToLower(parts[0])) {
		return fmt.Errorf("%s is part of the record and not written again", rel)
	}
	if len(parts) > 2 {
		return fmt.Errorf("%s lies deeper than a session folder goes", rel)
	}
	return nil
}
