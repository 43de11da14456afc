package diag

import (
	"slices"
	"strings"
)

// Nearest returns the valid word that a mistaken one most likely stands for,
// or "" where none is near: at most one slip in three letters, a swap of
// neighbours counting once (optimal string alignment; Damerau 1964).
func Nearest(word string, valid []string) string {
	w := strings.ToLower(strings.NewReplacer("-", "_", " ", "_").Replace(word))
	if len(w) > 64 {
		return ""
	}
	best, least := "", 1+max(1, len([]rune(w))/3)
	for _, v := range valid {
		d := slips(w, strings.ToLower(v))
		if d >= len([]rune(w)) {
			continue // nothing in common
		}
		if d < least || d == least && best != "" && commonStart(w, v) > commonStart(w, best) {
			best, least = v, d
		}
	}
	return best
}

// commonStart counts the letters that two words share from the start.
func commonStart(a, b string) int {
	b = strings.ToLower(b)
	n := 0
	for n < len(a) && n < len(b) && a[n] == b[n] {
		n++
	}
	return n
}

// slips counts insertions, deletions, substitutions and swaps of neighbours.
func slips(a, b string) int {
	s, t := []rune(a), []rune(b)
	before, prev := []int(nil), make([]int, len(t)+1)
	for j := range prev {
		prev[j] = j
	}
	for i := 1; i <= len(s); i++ {
		row := make([]int, len(t)+1)
		row[0] = i
		for j := 1; j <= len(t); j++ {
			cost := 1
			if s[i-1] == t[j-1] {
				cost = 0
			}
			row[j] = slices.Min([]int{prev[j] + 1, row[j-1] + 1, prev[j-1] + cost})
			if i > 1 && j > 1 && s[i-1] == t[j-2] && s[i-2] == t[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, prev = prev, row
	}
	return prev[len(t)]
}
