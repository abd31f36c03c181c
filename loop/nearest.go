package loop

import "strings"

// nearest returns the candidate closest to word, "" when none is close: equal but for
// case or for _ - and blanks, or within one edit for every three characters, two for
// short words being too many. An edit is an insertion, a deletion, a change or a swap of
// neighbours (optimal string alignment distance).
func nearest(word string, candidates []string) string {
	plain := func(s string) string {
		return strings.Map(func(c rune) rune {
			if c == '_' || c == '-' || c == ' ' {
				return -1
			}
			return c
		}, strings.ToLower(s))
	}
	w := []rune(plain(word))
	if len(w) > 64 {
		return "" // no known name is that long
	}
	best, found := 1+max(1, len(w)/3), ""
	for _, c := range candidates {
		if d := edits(w, []rune(plain(c))); d < best && d < max(len(w), 1) {
			best, found = d, c
		}
	}
	return found
}

func edits(a, b []rune) int {
	prev2, prev := make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range prev {
		prev[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row := make([]int, len(b)+1)
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(prev[j]+1, row[j-1]+1, prev[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], prev2[j-2]+1)
			}
		}
		prev2, prev = prev, row
	}
	return prev[len(b)]
}
