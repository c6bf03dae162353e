package ingest

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// esmSample is an invented file: the header's values in order, and the series in
// cm/s². Places and earthquakes do not exist.
type esmSample struct {
	keys   [][2]string
	x      []float64
	format string // of a value
}

// esmHeaderKeys are the 64 keys of header format DYNA 1.2 with the values that
// the samples share.
func esmHeaderKeys() [][2]string {
	return [][2]string{
		{"EVENT_NAME", "MONTE_INVENTATO"}, {"EVENT_ID", "INV-20410507_0000012"}, {"EVENT_DATE_YYYYMMDD", "20410507"}, {"EVENT_TIME_HHMMSS", "031415"},
		{"EVENT_LATITUDE_DEGREE", "40.000"}, {"EVENT_LONGITUDE_DEGREE", "5.500"}, {"EVENT_DEPTH_KM", "8.2"}, {"HYPOCENTER_REFERENCE", "invented"},
		{"MAGNITUDE_W", "5.6"}, {"MAGNITUDE_W_REFERENCE", "invented"}, {"MAGNITUDE_L", "5.4"}, {"MAGNITUDE_L_REFERENCE", "invented"},
		{"FOCAL_MECHANISM", "Normal faulting"}, {"NETWORK", "XQ"}, {"STATION_CODE", "BSC"}, {"STATION_NAME", "Borgo Scuro - Via: del Mulino"},
		{"STATION_LATITUDE_DEGREE", "40.1000"}, {"STATION_LONGITUDE_DEGREE", "5.6500"}, {"STATION_ELEVATION_M", "312"}, {"LOCATION", "00"},
		{"SENSOR_DEPTH_M", ""}, {"VS30_M/S", "450"}, {"SITE_CLASSIFICATION_EC8", "B*"}, {"MORPHOLOGIC_CLASSIFICATION", "T1"},
		{"EPICENTRAL_DISTANCE_KM", "16.9"}, {"EARTHQUAKE_BACKAZIMUTH_DEGREE", "228.9"},
		{"DATE_TIME_FIRST_SAMPLE_YYYYMMDD_HHMMSS", "20410507_031412.250"}, {"DATE_TIME_FIRST_SAMPLE_PRECISION", "milliseconds"},
		{"SAMPLING_INTERVAL_S", ""}, {"NDATA", ""}, {"DURATION_S", ""}, {"STREAM", ""}, {"UNITS", "cm/s^2"},
		{"INSTRUMENT", "sensor = QX-3 | digitizer = QX-3"}, {"INSTRUMENT_ANALOG/DIGITAL", "D"}, {"INSTRUMENTAL_FREQUENCY_HZ", ""},
		{"INSTRUMENTAL_DAMPING", ""}, {"FULL_SCALE_G", "2.0"}, {"N_BIT_DIGITAL_CONVERTER", "24"}, {"PGA_CM/S^2", ""}, {"TIME_PGA_S", ""},
		{"BASELINE_CORRECTION", "BASELINE REMOVED"}, {"FILTER_TYPE", "BUTTERWORTH"}, {"FILTER_ORDER", "2"},
		{"LOW_CUT_FREQUENCY_HZ", "0.080"}, {"HIGH_CUT_FREQUENCY_HZ", "40.000"}, {"LATE/NORMAL_TRIGGERED", "NT"},
		{"DATABASE_VERSION", "0.0"}, {"HEADER_FORMAT", "DYNA 1.2"}, {"DATA_TYPE", "ACCELERATION"}, {"PROCESSING", "manual (invented)"},
		{"DATA_TIMESTAMP_YYYYMMDD_HHMMSS", "20410601_120000"}, {"DATA_LICENSE", "U"}, {"DATA_CITATION", "Invented data: a ringing series, no earthquake"},
		{"DATA_CREATOR", ""}, {"ORIGINAL_DATA_MEDIATOR_CITATION", ""}, {"ORIGINAL_DATA_MEDIATOR", ""}, {"ORIGINAL_DATA_CREATOR_CITATION", ""},
		{"ORIGINAL_DATA_CREATOR", ""}, {"USER1", ""}, {"USER2", ""}, {"USER3", ""}, {"USER4", ""}, {"USER5", ""},
	}
}

func newESM(stream string, step float64, x []float64) esmSample {
	s := esmSample{keys: esmHeaderKeys(), x: x, format: "%14.6f"}
	peak, at := peakOf(x)
	return s.with("STREAM", stream, "SAMPLING_INTERVAL_S", fmt.Sprintf("%.6f", step), "NDATA", fmt.Sprint(len(x)),
		"DURATION_S", fmt.Sprintf("%.6f", float64(len(x)-1)*step), "PGA_CM/S^2", fmt.Sprintf("%.6f", peak), "TIME_PGA_S", fmt.Sprintf("%.6f", float64(at)*step))
}

// with returns the sample with other values, given as keys and values in turn.
func (s esmSample) with(pairs ...string) esmSample {
	s.keys = slices.Clone(s.keys)
	for i := 0; i < len(pairs); i += 2 {
		s.keys[s.line(pairs[i])-1][1] = pairs[i+1]
	}
	return s
}

// line returns the header line of a key, counted from 1.
func (s esmSample) line(key string) int {
	return 1 + slices.IndexFunc(s.keys, func(k [2]string) bool { return k[0] == key })
}

// renamed returns the sample with another spelling of a key.
func (s esmSample) renamed(key, to string) esmSample {
	s.keys = slices.Clone(s.keys)
	s.keys[s.line(key)-1][0] = to
	return s
}

func (s esmSample) lines() []string {
	var lines []string
	for _, k := range s.keys {
		lines = append(lines, strings.TrimRight(k[0]+": "+k[1], " "))
	}
	return append(lines, fixed(s.x, s.format, 1, false)...)
}

func esmEast() esmSample  { return newESM("HNE", 0.005, ring(240, 152.25, 1.75, 0.975)) }
func esmNorth() esmSample { return newESM("HNN", 0.005, ring(240, -131.5, 1.7, 0.97)) }
func esmUp() esmSample    { return newESM("HNZ", 0.005, ring(240, 64.25, 1.6, 0.96)) }

// esmOld is an unprocessed file of header format DYNA 1.0, without the keys of
// licence and citation, in E notation, of a horizontal of unknown azimuth.
func esmOld() esmSample {
	s := newESM("HG2", 0.01, ring(90, 20.5, 1.5, 0.97)).with("HEADER_FORMAT", "DYNA 1.0", "PROCESSING", "none", "BASELINE_CORRECTION", "BASELINE NOT REMOVED",
		"LOW_CUT_FREQUENCY_HZ", "", "HIGH_CUT_FREQUENCY_HZ", "", "FILTER_TYPE", "", "FILTER_ORDER", "", "LOCATION", "", "UNITS", "gal", "LATE/NORMAL_TRIGGERED", "LT",
		"MAGNITUDE_W", "", "EVENT_NAME", "NONAME", "DATE_TIME_FIRST_SAMPLE_YYYYMMDD_HHMMSS", "", "VS30_M/S", "0", "SITE_CLASSIFICATION_EC8", "U")
	s.keys = append(s.keys[:s.line("DATA_LICENSE")-1], s.keys[s.line("USER1")-1:]...)
	s.format = "%14.6E"
	return s
}

// esmSpectrum is a file of spectral ordinates: period and value a line.
func esmSpectrum() []string {
	lines := esmEast().with("DATA_TYPE", "ACCELERATION RESPONSE SPECTRUM").lines()[:64]
	for i := range 105 {
		lines = append(lines, fmt.Sprintf("%10.4f%14.6f", 0.01*math.Pow(1000, float64(i)/104), 100/float64(i+1)))
	}
	return lines
}

// esmFixtures are the files under testdata/records/esm.
func esmFixtures(t testing.TB) []ringFixture {
	const format, stem = "esm", "XQ.BSC.00."
	east := esmEast()
	lines := east.lines()
	velocity := east.with("DATA_TYPE", "VELOCITY", "UNITS", "cm/s").renamed("PGA_CM/S^2", "PGV_CM/S").renamed("TIME_PGA_S", "TIME_PGV_S")
	return []ringFixture{
		{format, stem + "HNE.D.20410507.031415.C.ACC.ASC", lines, "\n"},
		{format, stem + "HNN.D.20410507.031415.C.ACC.ASC", esmNorth().lines(), "\n"},
		{format, stem + "HNZ.D.20410507.031415.C.ACC.ASC", esmUp().lines(), "\r\n"},
		{format, "XQ.BSC..HG2.D.20410507.031415.X.ACC.ASC", esmOld().lines(), "\n"},
		{format, stem + "HNE.D.20410507.031415.C.VEL.ASC", velocity.lines(), "\n"},
		{format, stem + "HNE.D.20410507.031415.C.SA.ASC", esmSpectrum(), "\n"},
		{format, "damaged-truncated.asc", lines[:150], "\n"},
		{format, "damaged-count.asc", east.with("NDATA", "230", "DURATION_S", "1.145000").lines(), "\n"},
		{format, "damaged-unit.asc", east.with("UNITS", "m/s^2").lines(), "\n"},
		{format, "damaged-peak.asc", east.with("PGA_CM/S^2", "15.225").lines(), "\n"},
		{format, "damaged-page-appended.asc", append(slices.Clone(lines), "<html>", "<body>502 Bad Gateway</body>", "</html>"), "\n"},
	}
}
