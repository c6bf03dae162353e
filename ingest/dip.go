package ingest

import (
	"fmt"
	"math"
)

// The limits in degrees within which a dip, the angle of an axis below the
// horizontal, is that of a horizontal or of a vertical, and up to which none is
// worth a word. An axis between the two has so much of both, as each of the
// three of a symmetric triaxial arrangement (35.26°) has, that its motion is
// neither: at 15° a horizontal has 97 % of its own direction and 26 % of the
// vertical. Common practice, with no source.
const (
	horizontalDip = 15
	verticalDip   = 75
	axisTolerance = 5
)

// mustBeTurned is what to do with channels that are neither.
const mustBeTurned = "the three channels of the sensor must be turned into vertical, north and east first"

// axisOfDip tells a horizontal from a vertical by its dip. What is neither is an
// error.
func axisOfDip(dipDeg float64) (Axis, error) {
	switch dip := math.Abs(dipDeg); {
	case dip <= horizontalDip:
		return AxisHorizontal, nil
	case dip >= verticalDip:
		return AxisVertical, nil
	}
	return AxisUnknown, fmt.Errorf("a dip of %g° is neither horizontal (up to %d°) nor vertical (from %d°): "+mustBeTurned,
		dipDeg, horizontalDip, verticalDip)
}

func axisName(axis Axis) string {
	if axis == AxisVertical {
		return "vertical"
	}
	return "horizontal"
}

// warnDip tells that an axis is not quite what it is taken for.
func warnDip(c *Channel, dipDeg float64, axis Axis) {
	dip := math.Abs(dipDeg)
	if axis == AxisHorizontal && dip > axisTolerance || axis == AxisVertical && dip < 90-axisTolerance {
		c.warn("a dip of %g°: taken for %s", dipDeg, axisName(axis))
	}
}
