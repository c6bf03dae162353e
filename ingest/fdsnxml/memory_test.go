package fdsnxml

import (
	"runtime"
	"runtime/debug"
	"runtime/metrics"
	"strings"
	"testing"
	"time"
)

// maxHeld is how many bytes a document may take for each of its own, beside
// freeMemory.
const (
	maxHeld    = 64
	freeMemory = 1 << 20
)

// checkHeld bounds what a document takes and leaves behind. Package xml drops most
// of what it allocates, up to 160 bytes for one of a document of smallest elements,
// so that only what is held after all counts where that is more.
func checkHeld(t *testing.T, data []byte, read func() (held any)) {
	t.Helper()
	limit := uint64(len(data))*maxHeld + freeMemory
	var start, end runtime.MemStats
	runtime.ReadMemStats(&start)
	held := read()
	runtime.ReadMemStats(&end)
	if end.TotalAlloc-start.TotalAlloc <= limit {
		return
	}
	runtime.GC()
	runtime.ReadMemStats(&end)
	if end.HeapAlloc > start.HeapAlloc+limit {
		t.Errorf("%d bytes held for %d bytes of XML", end.HeapAlloc-start.HeapAlloc, len(data))
	}
	runtime.KeepAlive(held)
}

// TestMemory reads documents of the smallest elements there are, and looks from time
// to time how much memory is in use; a moment missed makes it no stricter.
func TestMemory(t *testing.T) {
	defer debug.SetGCPercent(debug.SetGCPercent(10)) // what nothing holds is soon gone
	for name, unit := range map[string]string{
		"station/": "<a/>", "station/Channel": "<a/>", "station//": "<Channel/>", "station/Channel/Response": "<Stage/>", "station": "<Latitude/>",
		"station///": "<Channel><Latitude>1</Latitude><Longitude>1</Longitude></Channel>", "station////": `<Channel a="" b="" c="" d=""/>`,
		"events": "<event/>", "events/event": "<origin/>", "events/event/": "<magnitude/>", "events/event//": "<description/>",
	} {
		path := strings.FieldsFunc(name, func(r rune) bool { return r == '/' })
		body := strings.Repeat(unit, (1<<20)/len(unit))
		for i := len(path) - 1; i > 0; i-- {
			body = "<" + path[i] + ">" + body + "</" + path[i] + ">"
		}
		read := func(data []byte) { ReadEvents(t.Context(), data) }
		if body = "<quakeml><eventParameters>" + body + "</eventParameters></quakeml>"; path[0] == "station" {
			read = func(data []byte) { ReadStations(t.Context(), data) }
			body = strings.NewReplacer("quakeml", "FDSNStationXML", "eventParameters", "Network").Replace(body)
			body = strings.Replace(strings.Replace(body, "<Network>", "<Network><Station>", 1), "</Network>", "</Station></Network>", 1)
		}
		data := []byte(body)
		if peak := peakOf(func() { read(data) }); peak > uint64(len(data))*maxHeld+freeMemory {
			t.Errorf("%s of %s: %d bytes in use for %d bytes of XML", name, unit, peak, len(data))
		} else {
			t.Logf("%-24s of %-14.14s: %.1f bytes for one", name, unit, float64(peak)/float64(len(data)))
		}
	}
}

// peakOf is by how much the objects of the heap grew, at most, while f ran.
func peakOf(f func()) uint64 {
	objects := []metrics.Sample{{Name: "/memory/classes/heap/objects:bytes"}}
	now := func() uint64 { metrics.Read(objects); return objects[0].Value.Uint64() }
	runtime.GC()
	start := now()
	peak, stop, stopped := start, make(chan struct{}), make(chan struct{})
	go func() {
		defer close(stopped)
		for {
			select {
			case <-stop:
				return
			case <-time.After(200 * time.Microsecond):
				peak = max(peak, now())
			}
		}
	}()
	f()
	close(stop)
	<-stopped
	return peak - start
}
