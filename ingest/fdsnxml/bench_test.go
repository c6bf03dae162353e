package fdsnxml

import (
	"bytes"
	"fmt"
	"testing"
	"time"
)

// manyChannels is a document with n epochs of one channel: what finding equal ones
// costs must not grow with their number.
func manyChannels(n int) []byte {
	var b bytes.Buffer
	b.WriteString(`<FDSNStationXML xmlns="http://www.fdsn.org/xml/station/1"><Network code="XX"><Station code="CULM"><Latitude>30.5</Latitude><Longitude>149.75</Longitude>` + "\n")
	start := day(1990, 1, 1, 0)
	for i := range n {
		at := start.Add(time.Duration(i) * time.Minute).Format(time.RFC3339)
		fmt.Fprintf(&b, `<Channel code="HNE" startDate="%s"><Latitude>30.5</Latitude><Longitude>149.75</Longitude></Channel>`+"\n", at)
	}
	b.WriteString("</Station></Network></FDSNStationXML>")
	return b.Bytes()
}

// manyEvents is a document with n events, the latest first, as catalogues list them.
func manyEvents(n int) []byte {
	var b bytes.Buffer
	b.WriteString(`<quakeml xmlns="http://quakeml.org/xmlns/bed/1.2"><eventParameters>` + "\n")
	start := day(2041, 1, 1, 0)
	for i := range n {
		at := start.Add(-time.Duration(i) * time.Minute).Format(time.RFC3339)
		fmt.Fprintf(&b, `<event publicID="smi:x/%d"><origin><time><value>%s</value></time><latitude><value>1</value></latitude><longitude><value>2</value></longitude></origin></event>`+"\n", i, at)
	}
	b.WriteString("</eventParameters></quakeml>")
	return b.Bytes()
}

// The documents are of 1 and of 4 MiB: the rate does not fall with the number of
// epochs. Below 1 MiB/s a document would hold up a run.
func BenchmarkReadStations(b *testing.B) {
	for _, mebibytes := range []int{1, 4} {
		data := manyChannels(mebibytes << 20 / 122)
		b.Run(fmt.Sprint(mebibytes, " MiB"), func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				v, err := ReadStations(b.Context(), data)
				if err != nil {
					b.Fatal(err)
				}
				v.Merge(v, "")
			}
		})
	}
}

func BenchmarkReadEvents(b *testing.B) {
	data := manyEvents(1 << 20 / 178)
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := ReadEvents(b.Context(), data); err != nil {
			b.Fatal(err)
		}
	}
}
