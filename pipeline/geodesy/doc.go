// Package geodesy measures on the WGS-84 ellipsoid: the length of the shortest
// line between two points, its azimuths at both ends, and from that the distance
// to a hypocentre.
//
// Promises. Lengths are metres, angles degrees, azimuths clockwise from north.
// Every pair of points has an answer, nearly antipodal ones too. No product is
// left for a compiler to fuse with a sum. The elementary functions come from a
// library that may differ in the last bits between architectures, which is
// nanometres here; whoever stores distances and wants equal digits everywhere
// rounds them to a step far above that.
//
// How it works. A geodesic of the ellipsoid is a great circle of the auxiliary
// sphere of reduced latitudes, where length and longitude are integrals along
// the arc (file series.go). Between two points the azimuth at the first is found
// by Newton's method inside a bracket, so that it converges always (file
// inverse.go), from a start that knows the shape of the problem near the
// antipode (file start.go).
//
// Start at Inverse; Hypocentral adds the depth.
//
// Source: C. F. F. Karney, "Algorithms for geodesics", Journal of Geodesy 87,
// 2013, 43–55, doi 10.1007/s00190-012-0578-z, in what follows Karney (2013), with
// its symbols: β reduced latitude, σ arc length and ω longitude on the auxiliary
// sphere, α azimuth, α0 azimuth at the equator, ε and n small parameters of the
// line and of the ellipsoid.
package geodesy
