package demo

import (
	"fmt"
	"math/rand/v2"
	"time"
)

// The region is an island in a part of the Pacific that has none. Names and
// codes are made up and checked against a list of the world's towns; the two
// characters of a network code are no claim to a registered one.
const regionName = "Quorvane"

// event is an invented earthquake. Coordinates have three decimals, magnitudes
// one and depths none, so that every format states the same.
type event struct {
	name      string
	origin    time.Time // UTC, whole seconds
	latitude  float64   // degrees north
	longitude float64   // degrees east
	depthKM   float64
	magnitude float64 // moment magnitude
	stressPa  float64 // stress drop
}

// code names an event by its origin time, as formats without an event id do.
func (e *event) code() string { return e.origin.Format("20060102T150405") }

// station is an invented recording site.
type station struct {
	network    *network
	code       string
	name       string
	latitude   float64 // degrees north
	longitude  float64 // degrees east
	elevationM float64
	vs30       float64 // m/s
	kappaS     float64
	rateHz     int
	// second is a further place of instruments at the station, if any.
	second place
}

// place is where at a station the instruments stand.
type place int

const (
	nowhere place = iota
	surface
	roof
	borehole
)

// network is an invented operator, which writes one format.
type network struct {
	code, name string
	format     string // in words
	folder     string
	newCode    func(n int) string // the code of a generated station, n < 1000
	byFile     bool               // the format has no room for codes of event and station
	// pattern is that of the names of a station's files, with %s for its code,
	// where the format has room for codes, but not for the network's.
	pattern string
	encode  func(*record) []file
}

var networks = [...]network{
	{"Q1", "Quorvane Works Programme", "California V2 text, three channels to a file", "q1-california-v2",
		func(n int) string { return fmt.Sprint(72000 + n) }, false, "*_%s*.V2", encodeV2},
	{"Q2", "Culmarra Province Network", "COSMOS V2c text, three channels to a file", "q2-cosmos",
		func(n int) string { return fmt.Sprintf("CP%03d", n) }, false, "", encodeCOSMOS},
	{"Q3", "Quorvane Ground Array", "K-NET ASCII, raw counts of one component to a file", "q3-knet",
		func(n int) string { return fmt.Sprintf("QVB%03d", n) }, false, "%s*", encodeKNET},
	{"Q4", "Sorvath University Array", "AT2 text in g, one component to a file", "q4-at2",
		func(n int) string { return fmt.Sprintf("SVX%03d", n) }, true, "", encodeAT2},
	{"Q5", "Ythmere Volunteer Network", "CSV with a time column, one component to a file", "q5-plain",
		func(n int) string { return fmt.Sprintf("YVX%03d", n) }, true, "", encodePlain},
}

// builtInStations returns the stations with names of their own, the networks in
// turn so that any five in a row show all formats.
func builtInStations() []station {
	q := func(i int) *network { return &networks[i-1] }
	return []station{
		{q(1), "71011", "Kellowane - Harbour Yard", 37.812, 169.948, 6, 240, 0.045, 50, nowhere},
		{q(2), "CULM", "Culmarra Observatory", 38.204, 170.318, 212, 640, 0.035, 200, nowhere},
		{q(3), "QVA001", "Marrendine", 38.047, 170.622, 38, 410, 0.040, 100, nowhere},
		{q(4), "SVA1", "Sorvath Campus", 37.936, 170.871, 74, 520, 0.040, 200, nowhere},
		{q(5), "YVA1", "Ythmere Quay", 38.391, 170.057, 4, 200, 0.050, 50, nowhere},
		{q(1), "71013", "Hesperlin - School", 38.118, 170.096, 51, 360, 0.040, 100, roof},
		{q(2), "JORV", "Jorvessa Reservoir", 38.466, 170.544, 340, 820, 0.030, 200, nowhere},
		{q(3), "QVAH02", "Murvane", 38.285, 170.803, 167, 730, 0.030, 100, borehole},
		{q(4), "SVA2", "Ellowick", 37.741, 170.402, 29, 310, 0.045, 100, nowhere},
		{q(5), "YVA2", "Druvenby Mill", 38.179, 171.106, 18, 280, 0.045, 100, nowhere},
		{q(1), "71027", "Vantrosk - River Bridge", 38.322, 169.781, 12, 270, 0.045, 50, nowhere},
		{q(2), "ONDE", "Ondelmar", 37.887, 171.224, 95, 560, 0.035, 100, nowhere},
		{q(3), "QVA003", "Fennaruk", 38.573, 170.201, 55, 470, 0.040, 100, nowhere},
		{q(4), "SVA3", "Garvethal Quarry", 38.098, 170.437, 388, 900, 0.030, 100, nowhere},
		{q(5), "YVA3", "Wythorla Farm", 37.668, 170.713, 41, 340, 0.045, 50, nowhere},
		{q(1), "71032", "Gorlune - Town Hall", 37.979, 170.249, 63, 430, 0.040, 50, nowhere},
		{q(2), "TOLV", "Tolvenna Signal Box", 38.512, 170.926, 22, 330, 0.045, 100, nowhere},
		{q(3), "QVA004", "Skarvell", 37.829, 170.588, 9, 230, 0.050, 100, nowhere},
		{q(4), "SVA4", "Zarnewick", 38.407, 171.287, 130, 680, 0.035, 100, nowhere},
		{q(5), "YVA4", "Lomberesk", 37.704, 170.136, 77, 590, 0.035, 50, nowhere},
	}
}

// builtInEvents returns the earthquakes with names of their own.
func builtInEvents() []event {
	at := func(y int, m time.Month, d, hour, minute, second int) time.Time {
		return time.Date(y, m, d, hour, minute, second, 0, time.UTC)
	}
	return []event{
		{"Feldrassa", at(2012, 5, 4, 10, 15, 32), 38.081, 170.353, 12, 6.1, 7.5e6},
		{"Brenvaul", at(2013, 2, 17, 22, 48, 9), 38.367, 170.688, 9, 5.3, 6.0e6},
		{"Ostrick", at(2014, 8, 30, 3, 2, 51), 37.624, 169.893, 21, 6.6, 9.0e6},
		{"Tamsel", at(2014, 8, 30, 19, 37, 14), 37.651, 169.941, 17, 5.0, 5.0e6},
		{"Hollumbra", at(2015, 11, 12, 6, 20, 45), 38.244, 170.961, 14, 5.8, 11.0e6},
		{"Ixendale", at(2016, 3, 26, 14, 55, 3), 38.609, 169.712, 28, 6.4, 8.0e6},
		{"Kaltrune", at(2017, 7, 8, 0, 11, 27), 37.902, 170.774, 7, 5.5, 6.5e6},
		{"Nethrosk", at(2018, 1, 21, 17, 29, 58), 38.152, 169.466, 19, 7.2, 8.5e6},
		{"Rostwyn", at(2018, 1, 23, 8, 44, 36), 38.201, 169.572, 16, 5.6, 7.0e6},
		{"Ullembry", at(2020, 10, 5, 12, 6, 19), 38.478, 171.133, 35, 6.0, 10.0e6},
		{"Vorhazel", at(2021, 12, 14, 21, 33, 40), 37.793, 171.352, 24, 6.9, 9.5e6},
		{"Auldrane", at(2023, 6, 9, 4, 50, 22), 38.013, 170.145, 6, 5.2, 5.5e6},
	}
}

// The random sequences drawn from one seed. Each record has its own, numbered
// from sequenceRecords on, so that records can be made in any order.
const (
	sequenceEvents = iota
	sequenceStations
	sequenceRecords
)

// generator returns the random numbers of one sequence of a seed.
func generator(seed int64, sequence uint64) *rand.Rand {
	return rand.New(rand.NewPCG(uint64(seed), sequence))
}

// events returns the first n events: those built in, then generated ones.
func events(n int, seed int64) []event {
	list := builtInEvents()
	rng := generator(seed, sequenceEvents)
	for i := len(list); i < n; i++ {
		// One a week, back in time from before those built in: no two begin in the
		// same minute.
		origin := time.Date(2012, 1, 1, 0, 0, 0, 0, time.UTC).AddDate(0, 0, -7*i)
		origin = origin.Add(time.Duration(rng.IntN(24*60*60)) * time.Second)
		list = append(list, event{
			name:      fmt.Sprintf("%s %d", regionName, i+1),
			origin:    origin,
			latitude:  between(rng, 37500, 38700) / 1000,
			longitude: between(rng, 169500, 171500) / 1000,
			depthKM:   between(rng, 6, 35),
			magnitude: between(rng, 50, 72) / 10,
			stressPa:  between(rng, 50, 110) * 1e5,
		})
	}
	return list[:n]
}

// stations returns the first n stations: those built in, then generated ones,
// the networks in turn.
func stations(n int, seed int64) []station {
	list := builtInStations()
	rng := generator(seed, sequenceStations)
	for i := len(list); i < n; i++ {
		net := &networks[i%len(networks)]
		list = append(list, station{
			network:    net,
			code:       net.newCode(i),
			name:       fmt.Sprintf("Outpost %d", i+1),
			latitude:   between(rng, 37600, 38600) / 1000,
			longitude:  between(rng, 169700, 171300) / 1000,
			elevationM: between(rng, 3, 400),
			vs30:       10 * between(rng, 20, 90),
			kappaS:     0.04,
			rateHz:     100,
		})
	}
	return list[:n]
}

// between returns a whole number in [low, high].
func between(rng *rand.Rand, low, high int) float64 {
	return float64(low + rng.IntN(high-low+1))
}
