package diag

import "strings"

// Nearest returns the known word that a user most likely meant by word, or ""
// where none is near. Words that differ only in case are nearest; otherwise
// the count of insertions, deletions, replacements and swaps of neighbours
// (the restricted Damerau-Levenshtein distance) decides, with at most one
// change for each three letters begun, and never so many that nothing of the
// word is left. Ties go to the word that comes first in known.
func Nearest(word string, known []string) string {
	if word == "" || len(word) > 64 {
		return ""
	}
	w := []rune(strings.ToLower(word))
	best, limit := "", (len(w)+2)/3
	for _, k := range known {
		if k == word {
			continue
		}
		r := []rune(strings.ToLower(k))
		d := distance(w, r)
		if d <= limit && d < min(len(w), len(r)) {
			best, limit = k, d-1
		}
	}
	return best
}

// distance is the restricted Damerau-Levenshtein distance of two words.
func distance(a, b []rune) int {
	before := make([]int, len(b)+1)
	prev := make([]int, len(b)+1)
	next := make([]int, len(b)+1)
	for j := range prev {
		prev[j] = j
	}
	for i := 1; i <= len(a); i++ {
		next[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			next[j] = min(prev[j]+1, next[j-1]+1, prev[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				next[j] = min(next[j], before[j-2]+1)
			}
		}
		before, prev, next = prev, next, before
	}
	return prev[len(b)]
}
