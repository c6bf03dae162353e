// Package fdsnxml reads the two XML documents in which seismic networks publish
// what their recordings do not say: StationXML 1.x, the channels with their
// sensitivities, and QuakeML 1.2, the events.
//
// Promises: a document with a document type or an entity of its own is refused;
// elements of other namespaces and unknown ones are passed over; what a document
// leaves out stays unknown; an error names the line.
//
// Start at ReadStations and ReadEvents; Kind tells the documents apart, and
// Inventory.Lookup finds the epochs of a channel that cover a time, and whether they
// agree.
//
// Sources: FDSN StationXML schema 1.2; QuakeML 1.2, basic event description
// (2013).
package fdsnxml
