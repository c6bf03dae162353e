package ingest

import (
	"strconv"
	"strings"
	"time"
)

// catalogueStatement is what a row says of an event or a station in one column.
type catalogueStatement struct {
	column string
	text   string // "" where the row does not state it
}

// contradictions returns an error for every row that says something else of an
// event or a station than an earlier row does. Which of the two got into the
// store would depend on the order of the files.
func (c *Catalogue) contradictions() []*ParseError {
	type said struct {
		text string
		line int
	}
	first := map[string]said{}
	var faults []*ParseError
	note := func(row *catalogueRow, subject string, statements []catalogueStatement) {
		for _, s := range statements {
			if s.text == "" {
				continue
			}
			key := strings.ToLower(subject) + "\x00" + s.column
			before, ok := first[key]
			if !ok {
				first[key] = said{s.text, row.line}
			} else if before.text != s.text {
				faults = append(faults, refuse(row.line, s.column, "%s: %s here, %s in line %d", subject, s.text, before.text, before.line))
			}
		}
	}
	for _, row := range c.rows {
		if row.event != "" {
			note(row, "event "+row.event, eventStatements(&row.channel.Event))
		}
		if row.station != "" {
			station := Station{Network: row.network, Code: row.station}
			note(row, "station "+withNetwork(station), stationStatements(&row.channel.Station))
		}
	}
	return faults
}

func eventStatements(e *Event) []catalogueStatement {
	return []catalogueStatement{
		{"event_name", e.Name}, {"origin_time", timeText(e.Origin) + timeText(e.Date)},
		{"magnitude", numberText(e.Magnitude)}, {"magnitude_type", e.MagnitudeType}, {"depth_km", numberText(e.DepthKM)},
		{"event_latitude", numberText(e.Latitude)}, {"event_longitude", numberText(e.Longitude)},
	}
}

func stationStatements(s *Station) []catalogueStatement {
	return []catalogueStatement{
		{"station_name", s.Name}, {"station_latitude", numberText(s.Latitude)}, {"station_longitude", numberText(s.Longitude)},
		{"elevation_m", numberText(s.ElevationM)}, {"vs30_m_s", numberText(s.Vs30)}, {"site_class", s.SiteClass},
	}
}

func numberText(n Number) string {
	if !n.Known {
		return ""
	}
	return strconv.FormatFloat(n.Value, 'g', -1, 64)
}

func timeText(at time.Time) string {
	if at.IsZero() {
		return ""
	}
	return at.Format(time.RFC3339)
}
