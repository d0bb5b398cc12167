package form

// Nearest returns the candidate that a mistyped word most likely meant, or
// "" where none is near enough.
func Nearest(word string, candidates []string) string {
	best, least := "", 1+len(word)/3
	for _, c := range candidates {
		if len(c) > len(word)+least || len(word) > len(c)+least {
			continue
		}
		if d := distance(word, c); d <= least && (best == "" || d < least) {
			best, least = c, d
		}
	}
	return best
}

// distance is the number of letters to insert, drop, replace or swap with
// their neighbour to make b of a (restricted Damerau–Levenshtein distance).
func distance(a, b string) int {
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return last[len(b)]
}
