package pipeline

import (
	"strconv"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// account is what one source says of a channel's event, station and record.
type account struct {
	by      string // db.ByCatalogue …
	source  string
	scheme  string // of the event's identifier: identifiers of one scheme tell earthquakes apart
	channel ingest.Channel
	quakes  []ingest.CatalogueEvent // accounts of the one whose waves came while the channel recorded
}

// statements are what the account says, of the subjects with these ids.
func (a account) statements(k db.RecordKey) []db.Statement {
	var out []db.Statement
	add := func(kind string, id int64, attribute, value string) {
		if id != 0 && value != "" {
			out = append(out, db.Statement{
				Subject: db.Subject{Kind: kind, ID: id}, Attribute: attribute, By: a.by, Value: value, Source: a.source,
			})
		}
	}
	e, s, d := &a.channel.Event, &a.channel.Station, &a.channel.Distances
	if e.ID != "" && a.scheme != "" {
		add(db.SubjectEvent, k.EventID, db.AttributeIdentifier, a.scheme+":"+e.ID)
	}
	add(db.SubjectEvent, k.EventID, db.AttributeName, e.Name)
	add(db.SubjectEvent, k.EventID, db.AttributeOriginTime, timeValue(e.Origin))
	add(db.SubjectEvent, k.EventID, db.AttributePosition, positionValue(e.Latitude, e.Longitude))
	add(db.SubjectEvent, k.EventID, db.AttributeDepth, numberValue(e.DepthKM))
	add(db.SubjectEvent, k.EventID, db.AttributeMagnitude, magnitudeValue(e.Magnitude, e.MagnitudeType))
	add(db.SubjectStation, k.StationID, db.AttributeName, s.Name)
	add(db.SubjectStation, k.StationID, db.AttributePosition, positionValue(s.Latitude, s.Longitude))
	add(db.SubjectStation, k.StationID, db.AttributeElevation, numberValue(s.ElevationM))
	add(db.SubjectStation, k.StationID, db.AttributeVs30, numberValue(s.Vs30))
	add(db.SubjectStation, k.StationID, db.AttributeSiteClass, s.SiteClass)
	add(db.SubjectRecord, k.ID, db.AttributeDistance, numberValue(a.channel.DistanceKM))
	add(db.SubjectRecord, k.ID, db.AttributeEpicentral, numberValue(d.EpicentralKM))
	add(db.SubjectRecord, k.ID, db.AttributeHypocentral, numberValue(d.HypocentralKM))
	add(db.SubjectRecord, k.ID, db.AttributeRupture, numberValue(d.RuptureKM))
	add(db.SubjectRecord, k.ID, db.AttributeJoynerBoore, numberValue(d.JoynerBooreKM))
	return out
}

func timeValue(at time.Time) string {
	if at.IsZero() {
		return ""
	}
	return at.UTC().Format(time.RFC3339Nano)
}

func numberValue(n ingest.Number) string {
	if !n.Known {
		return ""
	}
	return strconv.FormatFloat(n.Value, 'g', -1, 64)
}

func positionValue(latitude, longitude ingest.Number) string {
	if !latitude.Known || !longitude.Known {
		return ""
	}
	return numberValue(latitude) + " " + numberValue(longitude)
}

// magnitudeValue is "" for a type alone, which is no statement of the magnitude.
func magnitudeValue(magnitude ingest.Number, kind string) string {
	if !magnitude.Known {
		return ""
	}
	return strings.TrimSpace(numberValue(magnitude) + " " + kind)
}

// taken is the first value of every attribute, which is the one to take.
type taken map[string]string

// takenOf takes from statements in order of precedence.
func takenOf(statements []db.Statement) taken {
	t := taken{}
	for _, s := range statements {
		if _, ok := t[s.Attribute]; !ok {
			t[s.Attribute] = s.Value
		}
	}
	return t
}

func (t taken) number(attribute string) *float64 {
	v, err := strconv.ParseFloat(t[attribute], 64)
	if err != nil {
		return nil
	}
	return &v
}

func (t taken) position() (latitude, longitude *float64) {
	lat, lon, _ := strings.Cut(t[db.AttributePosition], " ")
	both := taken{"lat": lat, "lon": lon}
	if latitude, longitude = both.number("lat"), both.number("lon"); latitude == nil || longitude == nil {
		return nil, nil
	}
	return latitude, longitude
}

func (t taken) event() db.Event {
	e := db.Event{Name: t[db.AttributeName], DepthKM: t.number(db.AttributeDepth)}
	e.Origin, _ = time.Parse(time.RFC3339Nano, t[db.AttributeOriginTime])
	e.LatitudeDeg, e.LongitudeDeg = t.position()
	magnitude, kind, _ := strings.Cut(t[db.AttributeMagnitude], " ")
	e.Magnitude, e.MagnitudeType = taken{"": magnitude}.number(""), kind
	return e
}

func (t taken) station() db.Station {
	s := db.Station{
		Name: t[db.AttributeName], ElevationM: t.number(db.AttributeElevation), Vs30MPS: t.number(db.AttributeVs30), SiteClass: t[db.AttributeSiteClass],
	}
	s.LatitudeDeg, s.LongitudeDeg = t.position()
	return s
}

// distancesOf takes the distances of known kind, and the best of all: that of the
// catalogue's column for it, then by how much of the earthquake's extent they know.
func distancesOf(statements []db.Statement) db.Distances {
	t := takenOf(statements)
	d := db.Distances{
		EpicentralKM: t.number(db.AttributeEpicentral), HypocentralKM: t.number(db.AttributeHypocentral),
		RuptureKM: t.number(db.AttributeRupture), JoynerBooreKM: t.number(db.AttributeJoynerBoore),
	}
	stated := t.number(db.AttributeDistance)
	order := []*float64{d.RuptureKM, d.JoynerBooreKM, d.HypocentralKM, d.EpicentralKM, stated}
	for _, s := range statements {
		if s.Attribute == db.AttributeDistance && s.By == db.ByCatalogue {
			order = append([]*float64{stated}, order...)
		}
	}
	for _, km := range order {
		if km != nil {
			d.BestKM = km
			break
		}
	}
	return d
}
