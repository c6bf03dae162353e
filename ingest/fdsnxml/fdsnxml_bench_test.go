package fdsnxml

import (
	"fmt"
	"strings"
	"testing"
)

// BenchmarkReadStations reads epochs of one channel, all unlike each other: the
// time of each must not grow with their number.
func BenchmarkReadStations(b *testing.B) {
	for _, n := range []int{1000, 10000} {
		var s strings.Builder
		s.WriteString(`<FDSNStationXML xmlns="http://www.fdsn.org/xml/station/1"><Network code="XX"><Station code="TARN"><Latitude>1</Latitude><Longitude>1</Longitude><Elevation>0</Elevation>`)
		for i := range n {
			fmt.Fprintf(&s, `<Channel code="HNE" locationCode="00"><Latitude>1</Latitude><Longitude>1</Longitude><Elevation>0</Elevation><Depth>%d</Depth></Channel>`, i)
		}
		s.WriteString("</Station></Network></FDSNStationXML>")
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			b.SetBytes(int64(s.Len()))
			for b.Loop() {
				v, err := ReadStations([]byte(s.String()))
				if err != nil || len(v.Channels) != n {
					b.Fatal(len(v.Channels), err)
				}
			}
		})
	}
}
