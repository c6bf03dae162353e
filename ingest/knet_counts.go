package ingest

import "math"

// maxCount is the largest count read, that of a 32-bit digitiser. Sums of
// 2*MaxFileSize such counts, more than any packing holds, fit an int64.
const maxCount = math.MaxInt32

// readCounts reads exactly count integers from line on.
func readCounts(t *Text, line, count int) ([]float64, error) {
	counts := make([]float64, 0, min(count, countFields(t, line)))
	for n := line; n <= t.Len(); n++ {
		rest := t.Bytes(n)
		for {
			var field []byte
			if field, rest = nextField(rest); field == nil {
				break
			}
			v, ok := parseInteger(field)
			if !ok {
				return nil, refuse(n, "samples", "expected an integer, found %s", found(string(field)))
			}
			if len(counts) == count {
				return nil, refuse(n, "samples", "announced %d values, found more", count)
			}
			counts = append(counts, float64(v))
		}
	}
	if len(counts) < count {
		return nil, truncated(t.Len(), "samples", count, len(counts))
	}
	return counts, nil
}

// countFields is an upper bound of the fields from line on: a field and its
// blank take two bytes at least, so that what a header announces cannot make
// the reader allocate more than a few times the file's size.
func countFields(t *Text, line int) int {
	n := 0
	for i := line; i <= t.Len(); i++ {
		n += len(t.Bytes(i))/2 + 1
	}
	return n
}

// nextField returns the next run of bytes that are no blanks, nil at the end,
// and what follows it.
func nextField(line []byte) (field, rest []byte) {
	line = skipBlanks(line)
	if len(line) == 0 {
		return nil, nil
	}
	n := 1
	for n < len(line) && !isBlank(line[n]) {
		n++
	}
	return line[:n], line[n:]
}

// skipBlanks returns line without the blanks that it begins with.
func skipBlanks(line []byte) []byte {
	i := 0
	for i < len(line) && isBlank(line[i]) {
		i++
	}
	return line[i:]
}

func isBlank(b byte) bool { return b == ' ' || b == '\t' || b == '\f' || b == '\v' }

// parseInteger reads an integer of at most maxCount with an optional sign.
func parseInteger(b []byte) (int64, bool) {
	if len(b) == 0 || len(b) > 11 { // a sign and ten digits
		return 0, false
	}
	sign, first := signAt(b[0])
	v, end := digitsAt(b, first, 0)
	if end == first || end < len(b) || v > maxCount {
		return 0, false
	}
	if sign != 0 {
		return -int64(v), true
	}
	return int64(v), true
}

// removeMean turns counts into m/s² about the mean of the whole record, which
// the network's own peak refers to.
func removeMean(c *Channel) {
	mean := meanOf(c.Acceleration)
	for i, v := range c.Acceleration {
		c.Acceleration[i] = (v - mean) * c.UnitMPS2
	}
}

// meanOf returns the mean of x, whose sum is exact where all are counts. Of other
// numbers it is compensated.
func meanOf(x []float64) float64 {
	sum := int64(0)
	for _, v := range x {
		if v != math.Trunc(v) || math.Abs(v) > maxCount+1 {
			return compensatedSum(x) / float64(len(x))
		}
		sum += int64(v)
	}
	return float64(sum) / float64(len(x))
}

// compensatedSum adds up x and, apart, what each addition rounds off.
//
// Source: Neumaier, ZAMM 54, 1974 (from memory).
func compensatedSum(x []float64) float64 {
	sum, lost := 0.0, 0.0
	for _, v := range x {
		next := sum + v
		if math.Abs(sum) >= math.Abs(v) {
			lost += (sum - next) + v
		} else {
			lost += (v - next) + sum
		}
		sum = next
	}
	return sum + lost
}
