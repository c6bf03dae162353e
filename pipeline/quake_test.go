package pipeline

import (
	"testing"
	"time"

	"swaybook/ingest"
)

// listed is an event of an invented list, so many seconds after quakeTime.
func listed(id string, later, lat, lon, magnitude float64) ingest.CatalogueEvent {
	return ingest.CatalogueEvent{PublicID: id, Event: ingest.Event{
		ID: id, Origin: quakeTime.Add(seconds(later)), Latitude: ingest.Known(lat), Longitude: ingest.Known(lon),
		DepthKM: ingest.Known(10), Magnitude: ingest.Known(magnitude),
	}}
}

func TestQuakeOf(t *testing.T) {
	// The station is 111 km north of EV1, whose waves take 14 to 45 s.
	station := ingest.Station{Latitude: ingest.Known(42), Longitude: ingest.Known(14)}
	starting := func(later float64) ingest.Channel {
		return ingest.Channel{Station: station, Start: quakeTime.Add(seconds(later)), StepS: 0.01}
	}
	said := func(later, lat, magnitude float64) ingest.Channel {
		c := starting(0)
		c.Event = listed("", later, lat, 14, magnitude).Event
		return c
	}
	events := []ingest.CatalogueEvent{listed("EV1", 0, 41, 14, 6), listed("EV2", 400, 41, 14, 5), listed("EV3", 420, 41.1, 14, 4.9)}
	for _, test := range []struct {
		name    string
		channel ingest.Channel
		want    string
	}{
		{"waves come while it records", starting(10), "EV1"},
		{"it starts within the strong motion", starting(40), "EV1"},
		{"it starts too late", starting(50), ""},
		{"it ends too early", starting(-50), ""},
		{"two events are none", starting(420), ""},
		{"what it says decides", said(402, 41, 5), "EV2"},
		{"the nearer one", said(415, 41.1, 5), "EV3"},
		{"too far apart", said(402, 42, 5), ""},
		{"neither start nor place", ingest.Channel{StepS: 0.01, Start: time.Time{}}, ""},
	} {
		got, ok := quakeOf(events, &test.channel, 6001, ingest.Station{})
		if ok != (test.want != "") || got.PublicID != test.want {
			t.Errorf("%s: %q, want %q", test.name, got.PublicID, test.want)
		}
	}
}
