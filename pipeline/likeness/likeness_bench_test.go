package likeness

import "testing"

// BenchmarkCompare has two motions of 12 000 samples: other ones that cannot be
// parted beforehand, the same but for a factor and a cut, at another step, the same in
// the band only, and two that are parted by what is kept of them.
func BenchmarkCompare(b *testing.B) {
	x := invented(b, 7.5, 60e3, 1)
	a := motion(b, x, stepS)
	for _, c := range []struct {
		name  string
		other *Motion
	}{
		{"other motion of its kind", motion(b, invented(b, 7.5, 60e3, 2), stepS)},
		{"scaled and cut", motion(b, changed(x[400:], -2, 0), stepS)},
		{"every second sample", motion(b, everyNth(x, 2), 2*stepS)},
		{"with a drift", motion(b, ramp.at(x, 0.1, nil), stepS)},
		{"parted at once", motion(b, invented(b, 4, 10e3, 3), stepS)},
	} {
		b.Run(c.name, func(b *testing.B) {
			var comparer Comparer
			b.ReportAllocs()
			for b.Loop() {
				comparer.Compare(a, c.other)
			}
		})
	}
}

func BenchmarkNewMotion(b *testing.B) {
	x := invented(b, 7.5, 60e3, 1)
	b.ReportAllocs()
	b.SetBytes(int64(8 * len(x)))
	for b.Loop() {
		motion(b, x, stepS)
	}
}
