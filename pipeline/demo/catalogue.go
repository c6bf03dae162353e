package demo

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"strconv"
	"time"
)

// catalogueColumns are the columns of catalogue.csv.
var catalogueColumns = []string{
	"file", "event", "station", "network", "event_name", "origin_time", "magnitude", "magnitude_type",
	"distance_km", "depth_km", "event_latitude", "event_longitude", "station_name",
	"station_latitude", "station_longitude", "elevation_m", "vs30_m_s", "siting",
}

// catalogue returns the table that tells what the records leave out: one row for
// each event, one for each station, and one for each pair of the two with their
// epicentral distance. Where a format has no room for the codes of event or
// station, the row of the pair goes by the names of the files; where it has none
// for the network, a further row for the station's files gives it.
func catalogue(events []event, stations []station) ([]byte, error) {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	row := func(values map[string]string) {
		cells := make([]string, len(catalogueColumns))
		for i, name := range catalogueColumns {
			cells[i] = values[name]
		}
		w.Write(cells) // a bytes.Buffer does not fail; Flush reports what else might
	}
	w.Write(catalogueColumns)
	for i := range events {
		row(eventRow(&events[i]))
	}
	for i := range stations {
		row(stationRow(&stations[i]))
		if pattern := stations[i].network.pattern; pattern != "" {
			row(map[string]string{"file": fmt.Sprintf(pattern, stations[i].code), "network": stations[i].network.code})
		}
	}
	for i := range events {
		for j := range stations {
			row(pairRow(&events[i], &stations[j]))
		}
	}
	w.Flush()
	return b.Bytes(), w.Error()
}

func eventRow(e *event) map[string]string {
	return map[string]string{
		"event": e.code(), "event_name": e.name, "origin_time": e.origin.Format(time.RFC3339),
		"magnitude": decimals(e.magnitude, 1), "magnitude_type": "Mw", "depth_km": number(e.depthKM),
		"event_latitude": decimals(e.latitude, 3), "event_longitude": decimals(e.longitude, 3),
	}
}

func stationRow(s *station) map[string]string {
	return map[string]string{
		"station": s.code, "station_name": s.name,
		"station_latitude": decimals(s.latitude, 3), "station_longitude": decimals(s.longitude, 3),
		"elevation_m": number(s.elevationM), "vs30_m_s": number(s.vs30),
	}
}

func pairRow(e *event, s *station) map[string]string {
	km, _ := epicentral(e, s)
	row := map[string]string{"event": e.code(), "station": s.code, "distance_km": decimals(km, 2)}
	if s.network.byFile {
		row["file"] = e.code() + "_" + s.code + "_*"
		row["network"] = s.network.code
		row["siting"] = "free-field"
	}
	return row
}

func decimals(v float64, n int) string { return strconv.FormatFloat(v, 'f', n, 64) }
