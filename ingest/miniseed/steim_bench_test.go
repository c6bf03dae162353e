package miniseed

import (
	"fmt"
	"testing"
)

// BenchmarkDecode reports bytes of decoded float64. The walk's steps take all
// sizes up to 3000, so that all divisions of a word occur in turn.
func BenchmarkDecode(b *testing.B) {
	x := walk(400_000, 3000, 1)
	for _, e := range []Encoding{Int16, Int32, Float32, Float64, Steim1, Steim2} {
		for _, version := range []int{2, 3} {
			r := invented(e, x)
			r.Length = 4096
			data := r.Series(version)
			b.Run(fmt.Sprintf("%v/version %d", e, version), func(b *testing.B) {
				b.SetBytes(int64(8 * len(x)))
				b.ReportAllocs()
				for b.Loop() {
					if f, err := Decode(b.Context(), data); err != nil || f.Channels[0].Err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
