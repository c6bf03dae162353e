package demo

import "fmt"

// readmeName is the file by which a folder is known again.
const readmeName = "README.txt"

// signature tells the files of one set of options from those of another.
func signature(o Options) string {
	return fmt.Sprintf("Seed %d, %d earthquakes, %d stations", o.Seed, o.Events, o.Stations)
}

// readme returns the text that goes with the files.
func readme(seed int64, sum *Summary) []byte {
	b := fmt.Appendf(nil, `Records of an invented region
=============================

Everything in this folder is invented. There is no island of %s, its
networks, stations and earthquakes do not exist, and no instrument recorded
these motions: they are simulated by the stochastic method (D. M. Boore, 2003,
Pure and Applied Geophysics 160:635-676). They show what record files look like
and are of no use for the design or assessment of anything.

%s, %d records of three components.

`, regionName, signature(Options{Seed: int(seed), Events: sum.Events, Stations: sum.Stations}), sum.Records)
	for _, n := range networks[:min(len(networks), sum.Stations)] {
		b = fmt.Appendf(b, "%-18s %s, %s\n", n.folder, n.name, n.format)
	}
	b = append(b, `
catalogue.csv      magnitudes, places, Vs30 and distances, which some of the
                   formats leave out. Distances are epicentral, in km.
`...)
	if sum.Damaged > 0 {
		b = append(b, `damaged            one file cut off in its samples and one in volts, to show how a
                   file is refused
`...)
	}
	return fmt.Appendf(b, `
Accelerations are filtered from %g Hz to 40 Hz, or to 0.4 of the sampling rate
where that is less; those of the ground array are raw counts, with the offset,
noise and drift of a sensor. One station has a second set of instruments on a roof and
one has a borehole, where the list of stations reaches that far; neither is a
ground motion at the surface.
`, lowCutHz)
}
