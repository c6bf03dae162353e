package db

import "strconv"

// exact is the shortest decimal that restores the number, "-" for none.
func exact(x *float64) string {
	if x == nil {
		return "-"
	}
	return strconv.FormatFloat(*x, 'g', -1, 64)
}
