package ingest

import (
	"fmt"
	"maps"
	"slices"
	"strings"
	"time"

	"swaybook/ingest/tomlfile"
)

// scope is what columns speak of, as bits.
type scope int

const (
	scopeEvent scope = 1 << iota
	scopeStation
	scopeRecord // needs event and station
	scopeFile   // wanted before a file is parsed
)

// catalogueColumn is one column: its name, what it speaks of, how a cell that is
// stated is taken into a row, and whether that is a number.
type catalogueColumn struct {
	name   string
	scope  scope
	set    func(row *catalogueRow, text string) error
	number bool
}

// catalogueColumns are the columns by name.
var catalogueColumns = columnsByName(
	catalogueColumn{name: "file", set: (*catalogueRow).setFile},
	textColumn("event", 0, func(r *catalogueRow) *string { return &r.event }),
	textColumn("station", 0, func(r *catalogueRow) *string { return &r.station }),
	textColumn("network", 0, func(r *catalogueRow) *string { return &r.network }),
	textColumn("component", 0, func(r *catalogueRow) *string { return &r.component }),
	textColumn("event_name", scopeEvent, func(r *catalogueRow) *string { return &r.channel.Event.Name }),
	catalogueColumn{name: "origin_time", scope: scopeEvent, set: setOrigin},
	numberColumn("magnitude", scopeEvent, magnitudeLimits, func(r *catalogueRow) *Number { return &r.channel.Event.Magnitude }),
	textColumn("magnitude_type", scopeEvent, func(r *catalogueRow) *string { return &r.channel.Event.MagnitudeType }),
	numberColumn("depth_km", scopeEvent, depthLimits, func(r *catalogueRow) *Number { return &r.channel.Event.DepthKM }),
	numberColumn("event_latitude", scopeEvent, latitudeLimits, func(r *catalogueRow) *Number { return &r.channel.Event.Latitude }),
	numberColumn("event_longitude", scopeEvent, limits{-180, 360}, func(r *catalogueRow) *Number { return &r.channel.Event.Longitude }),
	numberColumn("distance_km", scopeRecord, distanceLimits, func(r *catalogueRow) *Number { return &r.channel.DistanceKM }),
	numberColumn("epicentral_km", scopeRecord, distanceLimits, func(r *catalogueRow) *Number { return &r.channel.Distances.EpicentralKM }),
	numberColumn("hypocentral_km", scopeRecord, distanceLimits, func(r *catalogueRow) *Number { return &r.channel.Distances.HypocentralKM }),
	numberColumn("rupture_km", scopeRecord, distanceLimits, func(r *catalogueRow) *Number { return &r.channel.Distances.RuptureKM }),
	numberColumn("jb_km", scopeRecord, distanceLimits, func(r *catalogueRow) *Number { return &r.channel.Distances.JoynerBooreKM }),
	textColumn("station_name", scopeStation, func(r *catalogueRow) *string { return &r.channel.Station.Name }),
	numberColumn("station_latitude", scopeStation, latitudeLimits, func(r *catalogueRow) *Number { return &r.channel.Station.Latitude }),
	numberColumn("station_longitude", scopeStation, limits{-180, 360}, func(r *catalogueRow) *Number { return &r.channel.Station.Longitude }),
	numberColumn("elevation_m", scopeStation, limits{-500, 9000}, func(r *catalogueRow) *Number { return &r.channel.Station.ElevationM }),
	numberColumn("vs30_m_s", scopeStation, vs30Limits, func(r *catalogueRow) *Number { return &r.channel.Station.Vs30 }),
	catalogueColumn{name: "site_class", scope: scopeStation, set: setSiteClass},
	numberColumn("azimuth_deg", scopeStation, limits{0, 360}, func(r *catalogueRow) *Number { return &r.channel.Orientation.AzimuthDeg }),
	textColumn("instrument", scopeStation, func(r *catalogueRow) *string { return &r.channel.Instrument }),
	catalogueColumn{name: "siting", scope: scopeStation, set: setSiting},
	catalogueColumn{name: "unit", scope: scopeFile, set: setUnit},
	catalogueColumn{"dt_s", scopeFile, setStep, true},
	numberColumn("low_cut_hz", scopeRecord, limits{1e-6, 1e4}, func(r *catalogueRow) *Number { return &r.channel.LowCutHz }),
	numberColumn("high_cut_hz", scopeRecord, limits{1e-6, 1e4}, func(r *catalogueRow) *Number { return &r.channel.HighCutHz }),
)

func columnsByName(columns ...catalogueColumn) map[string]*catalogueColumn {
	m := make(map[string]*catalogueColumn, len(columns))
	for i := range columns {
		m[columns[i].name] = &columns[i]
	}
	return m
}

func textColumn(name string, s scope, place func(*catalogueRow) *string) catalogueColumn {
	return catalogueColumn{name: name, scope: s, set: func(row *catalogueRow, text string) error {
		*place(row) = text
		return nil
	}}
}

func numberColumn(name string, s scope, l limits, place func(*catalogueRow) *Number) catalogueColumn {
	return catalogueColumn{name, s, func(row *catalogueRow, text string) error {
		v, err := numberWithin(text, l)
		if err == nil {
			*place(row) = Known(v)
		}
		return err
	}, true}
}

func numberWithin(text string, l limits) (float64, error) {
	v, ok := parseNumber([]byte(text))
	switch {
	case !ok:
		return 0, fmt.Errorf("expected a number, found %s", found(text))
	case !l.hold(v):
		return 0, fmt.Errorf("%g is outside %g to %g", v, l.low, l.high)
	}
	return v, nil
}

func setOrigin(row *catalogueRow, text string) error {
	e := &row.channel.Event
	var ok bool
	if e.Origin, e.Date, ok = parseInstant(text); !ok {
		return fmt.Errorf("expected a time as 2006-01-02T15:04:05Z or a date as 2006-01-02, found %s", found(text))
	}
	return nil
}

// parseInstant reads RFC 3339 as a time, UTC, or YYYY-MM-DD as a day.
func parseInstant(text string) (at, day time.Time, ok bool) {
	if at, err := time.Parse(time.RFC3339, text); err == nil {
		return at.UTC(), time.Time{}, true
	}
	day, err := time.Parse(time.DateOnly, text)
	return time.Time{}, day, err == nil
}

func setSiting(row *catalogueRow, text string) error {
	siting, ok := parseSiting(text)
	if !ok {
		return fmt.Errorf("expected free-field, ground, structure, borehole or unknown, found %s", found(text))
	}
	row.channel.Siting = siting
	return nil
}

func setSiteClass(row *catalogueRow, text string) error {
	ground, ok := parseGroundType(text)
	if !ok {
		return fmt.Errorf("expected a ground type of EN 1998-1, A to E, S1 or S2, found %s", found(text))
	}
	row.channel.Station.SiteClass = ground
	return nil
}

// parseSiting reads the name of a siting, with a blank, an underscore or nothing
// for the hyphen.
func parseSiting(text string) (Siting, bool) {
	word := strings.NewReplacer(" ", "", "-", "", "_", "").Replace(strings.ToLower(text))
	for _, s := range []Siting{SitingUnknown, SitingFreeField, SitingGround, SitingStructure, SitingBorehole} {
		if word == strings.ReplaceAll(string(s), "-", "") {
			return s, true
		}
	}
	return "", false
}

func setUnit(row *catalogueRow, text string) error {
	if _, err := ParseUnit(text); err != nil {
		return err
	}
	row.unit = text
	return nil
}

func setStep(row *catalogueRow, text string) error {
	v, err := numberWithin(text, limits{MinStepS, MaxStepS})
	if err != nil {
		return err
	}
	row.stepS = v
	return nil
}

// nearestColumn returns the known column that name may be meant for: one that
// begins with it or that it begins with, else the one that the fewest changed
// letters lead to, at most one in three. It is "" where none is near.
func nearestColumn(name string) string {
	if len(name) < 3 || len(name) > 64 {
		return ""
	}
	names := slices.Sorted(maps.Keys(catalogueColumns))
	for _, known := range names {
		if strings.HasPrefix(known, name) || strings.HasPrefix(name, known+"_") {
			return known
		}
	}
	return tomlfile.Nearest(name, names, len(name)/3)
}
