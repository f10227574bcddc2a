package rig

import "testing"

func TestEdits(t *testing.T) {
	tests := []struct {
		a, b string
		want int
	}{
		{"", "", 0}, {"", "abc", 3}, {"sweep", "sweep", 0},
		{"kitten", "sitting", 3}, // the textbook pair of Levenshtein distances
		{"form", "from", 1},      // an exchange of neighbours
		{"ca", "abc", 3},         // where optimal string alignment differs from Damerau–Levenshtein's 2
	}
	for _, tt := range tests {
		if got := edits(tt.a, tt.b); got != tt.want {
			t.Errorf("edits(%q, %q) = %d, want %d", tt.a, tt.b, got, tt.want)
		}
		if got := edits(tt.b, tt.a); got != tt.want {
			t.Errorf("edits(%q, %q) = %d, want %d", tt.b, tt.a, got, tt.want)
		}
	}
}

func TestNearest(t *testing.T) {
	keys := []string{"tag", "serial", "claimed", "powering"}
	for word, want := range map[string]string{
		"Tag": "tag", "tga": "tag", "seral": "serial", "powring": "powering",
		"xyz": "", "": "", "colour": "",
	} {
		if got := nearest(word, keys); got != want {
			t.Errorf("nearest(%q) = %q, want %q", word, got, want)
		}
	}
}
