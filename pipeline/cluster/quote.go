package cluster

import "strings"

// plain are the characters that mean nothing to a shell, wherever they stand.
const plain = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_-./,:@%+"

// Quote is a word as a shell reads it, whatever is in it: POSIX, Shell & Utilities, 2.2.2.
func Quote(word string) string {
	if word != "" && strings.Trim(word, plain) == "" {
		return word
	}
	return "'" + strings.ReplaceAll(word, "'", `'\''`) + "'"
}

// slurmWord is a word as sbatch reads it off a line of options, whatever is in it: between
// quotes a backslash takes what follows as it is, and # begins no comment. Nothing is replaced.
func slurmWord(word string) string {
	if word != "" && strings.Trim(word, plain+"=") == "" {
		return word
	}
	return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`).Replace(word) + `"`
}

// line is a command of several words.
func line(words []string) string {
	quoted := make([]string, len(words))
	for i, w := range words {
		quoted[i] = Quote(w)
	}
	return strings.Join(quoted, " ")
}
