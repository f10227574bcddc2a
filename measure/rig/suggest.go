package rig

import "strings"

// nearest is the candidate most like word, or "" when none is like it: at most
// one change in three letters (common practice of command lines).
func nearest(word string, candidates []string) string {
	const longest = 40 // nobody's slip of the finger; and it bounds the work
	if len(word) > longest {
		return ""
	}
	best, least := "", 1+max(1, len(word)/3)
	for _, c := range candidates {
		if n := edits(strings.ToLower(word), c); n < least {
			best, least = c, n
		}
	}
	return best
}

// edits is the number of insertions, deletions, replacements and exchanges of
// neighbours that turn a into b, each place touched once (the optimal string
// alignment distance; Damerau, Commun. ACM 7 (1964) 171, from memory).
func edits(a, b string) int {
	before, last := make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row := make([]int, len(b)+1)
		row[0] = i
		for j := 1; j <= len(b); j++ {
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+differ(a[i-1], b[j-1]))
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last = last, row
	}
	return last[len(b)]
}

func differ(a, b byte) int {
	if a == b {
		return 0
	}
	return 1
}
