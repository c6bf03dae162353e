package tomlfile

import "strconv"

// Kind names a decoded value for messages: `the text "x"`, "a number".
func Kind(v any) string {
	switch v := v.(type) {
	case string:
		return "the text " + Quote(v)
	case int64, float64:
		return "a number"
	case bool:
		return "true or false"
	case []any:
		return "a list"
	case map[string]any:
		return "a table"
	}
	return "a date or time"
}

// Quote quotes a text for messages, shortened to 40 characters.
func Quote(text string) string {
	const limit = 40
	if r := []rune(text); len(r) > limit {
		text = string(r[:limit-1]) + "…"
	}
	return strconv.Quote(text)
}

// DidYouMean is what follows an unknown name for which there is a suggestion.
func DidYouMean(suggestion string) string {
	if suggestion == "" {
		return ""
	}
	return " (did you mean " + suggestion + "?)"
}

// NearestKey returns the known key that is two edits away at most, and no more
// than half of the letters; "" for none.
func NearestKey(key string, known []string) string {
	return Nearest(key, known, min(2, len(key)/2))
}

// Nearest returns the first of the names that the fewest edits lead to, at most
// so many, "" for none.
func Nearest(name string, names []string, most int) string {
	best, fewest := "", most+1
	for _, known := range names {
		if n := editDistance(name, known); n < fewest {
			best, fewest = known, n
		}
	}
	return best
}

// editDistance returns the number of bytes to insert, delete or replace that
// turn a into b (Levenshtein distance).
func editDistance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			replace := diagonal
			if a[i] != b[j] {
				replace++
			}
			diagonal = row[j+1]
			row[j+1] = min(replace, row[j]+1, diagonal+1)
		}
	}
	return row[len(b)]
}
