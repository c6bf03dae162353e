package pipeline

import (
	"math"
	"strconv"

	"swaybook/db"
	"swaybook/pipeline/geodesy"
)

// epicentralKM is the distance along the surface between two points in degrees,
// NaN where one is no point on it.
func epicentralKM(latitude1, longitude1, latitude2, longitude2 float64) float64 {
	line, err := geodesy.Inverse(latitude1, longitude1, latitude2, longitude2)
	if err != nil {
		return math.NaN()
	}
	return line.LengthM / 1000
}

// computedDistances are the distances that follow from where the earthquake and
// the station are.
func computedDistances(p db.RecordPlace) []db.Statement {
	if p.EventLatDeg == nil || p.EventLonDeg == nil || p.StationLatDeg == nil || p.StationLonDeg == nil {
		return nil
	}
	epicentral := epicentralKM(*p.EventLatDeg, *p.EventLonDeg, *p.StationLatDeg, *p.StationLonDeg)
	if math.IsNaN(epicentral) {
		return nil
	}
	out := []db.Statement{{Attribute: db.AttributeEpicentral, Value: distanceValue(epicentral)}}
	if p.DepthKM != nil {
		hypocentral := geodesy.Hypocentral(epicentral*1000, *p.DepthKM*1000) / 1000
		out = append(out, db.Statement{Attribute: db.AttributeHypocentral, Value: distanceValue(hypocentral)})
	}
	return out
}

// distanceValue writes a distance to the metre: coordinates of events are not
// known better than to a hundred of them, and all platforms write the same.
func distanceValue(km float64) string {
	return strconv.FormatFloat(math.Round(km*1000)/1000, 'g', -1, 64)
}
