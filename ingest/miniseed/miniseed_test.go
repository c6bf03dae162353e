package miniseed

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"swaybook/ingest/miniseed/miniseedtest"
)

var at = time.Date(2041, 3, 4, 8, 12, 16, 123_400_000, time.UTC)

// invented is the base of the records of these tests: a network, a station and
// an earthquake that never were.
func invented(e Encoding, x []float64) miniseedtest.Record {
	return miniseedtest.Record{
		Network: "XX", Station: "CULM", Location: "00", Channel: "HNE", Start: at, Rate: 100, Encoding: uint8(e), Samples: x,
	}
}

// walk is a random walk of whole numbers whose steps take all sizes up to the
// largest, so that every division of a Steim word occurs.
func walk(n int, largest float64, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 11))
	x := make([]float64, n)
	for i := 1; i < n; i++ {
		bits := math.Log2(largest) * (0.5 + 0.5*math.Sin(float64(i)/50))
		x[i] = x[i-1] + math.Round((2*r.Float64()-1)*math.Exp2(bits))
		if math.Abs(x[i]) > 30000 && largest <= 3000 || math.Abs(x[i]) > 1e9 {
			x[i] = x[i-1]
		}
	}
	return x
}

// one decodes what must be one channel.
func one(t *testing.T, data []byte) Channel {
	t.Helper()
	f, err := Decode(t.Context(), data)
	if err != nil {
		t.Fatal(err)
	}
	if len(f.Channels) != 1 {
		t.Fatalf("%d channels, want 1", len(f.Channels))
	}
	return f.Channels[0]
}

// trace decodes what must be one trace.
func trace(t *testing.T, data []byte) Trace {
	t.Helper()
	c := one(t, data)
	if c.Err != nil || len(c.Traces) != 1 {
		t.Fatalf("%d traces, %v, want one", len(c.Traces), c.Err)
	}
	return c.Traces[0]
}

func equal(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if math.Float64bits(a[i]) != math.Float64bits(b[i]) {
			return false
		}
	}
	return true
}

// TestRoundTrip decodes what the test's own encoder wrote, in every encoding,
// version and byte order. Steps of up to 2^29 need the widest Steim words.
func TestRoundTrip(t *testing.T) {
	for _, e := range []Encoding{Int16, Int32, Float32, Float64, Steim1, Steim2} {
		for _, n := range []int{1, 2, 3, 8, 500, 5000} {
			x := walk(n, 3000, uint64(n))
			switch e {
			case Int32, Steim1, Steim2:
				x = walk(n, 1<<28, uint64(n))
			case Float64:
				for i := range x {
					x[i] /= 7
				}
			}
			for _, form := range []struct {
				name          string
				version       int
				little, words bool
			}{{"3", 3, false, false}, {"2.4", 2, false, false}, {"2.4 little-endian", 2, true, true}, {"2.4 mixed", 2, true, false}} {
				r := invented(e, x)
				r.Little, r.LittleWords = form.little, form.words
				got := trace(t, r.Series(form.version))
				if !equal(got.Samples, x) {
					t.Errorf("%v, %d samples, version %s: other samples than were written", e, n, form.name)
				}
				if !got.Start.Equal(at) || got.Rate != 100 || got.Encoding != e || got.Flags != 0 || got.DriftS > 1e-4 {
					t.Errorf("%v, version %s: start %v rate %g %v flags %b drift %g", e, form.name, got.Start, got.Rate, got.Encoding, got.Flags, got.DriftS)
				}
			}
		}
	}
}

// TestSteimWraps has differences that leave the range of 32 bits.
func TestSteimWraps(t *testing.T) {
	x := []float64{math.MaxInt32, math.MinInt32, math.MaxInt32 - 5, 0, -3}
	if got := trace(t, invented(Steim1, x).One(2)); !equal(got.Samples, x) {
		t.Errorf("samples %v, want %v", got.Samples, x)
	}
}

// TestRecordsInAnyOrder shuffles records of two lengths and three channels.
func TestRecordsInAnyOrder(t *testing.T) {
	const seed = 3
	var pieces [][]byte
	want := map[string][]float64{}
	for i, name := range []string{"HNE", "HNN", "HNZ"} {
		x := walk(4000, 3000, uint64(i))
		want[name] = x
		r := invented([]Encoding{Steim1, Steim2, Int32}[i], x)
		r.Channel = name
		for k := 0; len(r.Samples) > 0; k++ {
			r.Length = []int{256, 1024, 4096}[k%3]
			part := r
			n := min(len(r.Samples), 40)
			part.Samples = r.Samples[:n]
			pieces = append(pieces, part.One(2+k%2))
			r.Samples = r.Samples[n:]
			r.Start = r.Start.Add(time.Duration(n) * 10 * time.Millisecond)
		}
	}
	rand.New(rand.NewPCG(seed, 1)).Shuffle(len(pieces), func(i, j int) { pieces[i], pieces[j] = pieces[j], pieces[i] })
	var data []byte
	for _, p := range pieces {
		data = append(data, p...)
	}
	f, err := Decode(t.Context(), data)
	if err != nil || len(f.Channels) != 3 {
		t.Fatalf("seed %d: %d channels, %v", seed, len(f.Channels), err)
	}
	for i, c := range f.Channels {
		if c.Err != nil || len(c.Traces) != 1 || c.ID.Channel != []string{"HNE", "HNN", "HNZ"}[i] || !equal(c.Traces[0].Samples, want[c.ID.Channel]) {
			t.Errorf("seed %d: channel %v, %d traces, %v", seed, c.ID, len(c.Traces), c.Err)
		}
	}
}

// piece is part of a series as one record, shifted by a fraction of a sample.
func piece(x []float64, from, to int, shift float64) []byte {
	r := invented(Int32, x[from:to])
	r.Start = at.Add(time.Duration((float64(from) + shift) * 1e7))
	return r.One(3)
}

func TestGapsAndOverlaps(t *testing.T) {
	x := walk(300, 3000, 1)
	other := append([]float64(nil), x...)
	other[95]++
	join := func(parts ...[]byte) (out []byte) {
		for _, p := range parts {
			out = append(out, p...)
		}
		return out
	}
	cases := []struct {
		name     string
		data     []byte
		traces   []int // samples
		gaps     string
		repeated int
		err      string
	}{
		{name: "contiguous", data: join(piece(x, 0, 100, 0), piece(x, 100, 200, 0)), traces: []int{200}},
		{name: "0.49 of a sample late", data: join(piece(x, 0, 100, 0), piece(x, 100, 200, 0.49)), traces: []int{200}},
		{name: "0.49 of a sample early", data: join(piece(x, 0, 100, 0), piece(x, 100, 200, -0.49)), traces: []int{200}},
		{name: "gap of one", data: join(piece(x, 0, 100, 0), piece(x, 101, 200, 0)), traces: []int{100, 99}, gaps: "08:12:17.1234 1"},
		{name: "gap of 50", data: join(piece(x, 150, 200, 0), piece(x, 0, 100, 0)), traces: []int{100, 50}, gaps: "08:12:17.1234 50"},
		{name: "overlap", data: join(piece(x, 0, 100, 0), piece(x, 90, 200, 0)), traces: []int{200}, repeated: 10},
		{name: "twice", data: join(piece(x, 0, 100, 0), piece(x, 0, 100, 0), piece(x, 100, 110, 0)), traces: []int{110}, repeated: 100},
		{name: "inside", data: join(piece(x, 0, 100, 0), piece(x, 20, 30, 0), piece(x, 100, 110, 0)), traces: []int{110}, repeated: 10},
		{
			name: "overlap with another value", data: join(piece(x, 0, 100, 0), piece(other, 90, 110, 0)),
			err: fmt.Sprintf("record at byte 461: overlaps with the records before it, and sample 6 is %g there and %g here", x[95], other[95]),
		},
		{
			name: "of samples between those", data: join(piece(x, 0, 100, 0), piece(x, 90, 110, -0.6)),
			err: fmt.Sprintf("record at byte 461: overlaps with the records before it, and sample 1 is %g there and %g here", x[89], x[90]),
		},
	}
	for _, k := range cases {
		t.Run(k.name, func(t *testing.T) {
			c := one(t, k.data)
			if k.err != "" || c.Err != nil {
				if c.Err == nil || c.Err.Error() != k.err {
					t.Fatalf("error %v, want %q", c.Err, k.err)
				}
				return
			}
			var lengths []int
			repeated := 0
			for _, tr := range c.Traces {
				lengths = append(lengths, len(tr.Samples))
				repeated += tr.Repeated
			}
			var gaps []string
			for _, g := range c.Gaps() {
				gaps = append(gaps, fmt.Sprint(g.Start.Format("15:04:05.9999 "), g.Missing))
			}
			if fmt.Sprint(lengths) != fmt.Sprint(k.traces) || strings.Join(gaps, ", ") != k.gaps || repeated != k.repeated {
				t.Errorf("traces of %v samples, gaps %q, %d repeated, want %v, %q, %d", lengths, gaps, repeated, k.traces, k.gaps, k.repeated)
			}
			if len(c.Traces) == 1 && !equal(c.Traces[0].Samples, x[:k.traces[0]]) {
				t.Error("other samples than were written")
			}
		})
	}
}

// TestDrift has records that are each 0.3 samples later than the samples before
// them say.
func TestDrift(t *testing.T) {
	x := walk(400, 3000, 1)
	var data []byte
	for i := range 4 {
		data = append(data, piece(x, 100*i, 100*i+100, 0.3*float64(i))...)
	}
	got := trace(t, data)
	if math.Abs(got.DriftS-0.009) > 1e-9 || !equal(got.Samples, x) {
		t.Errorf("drift of %g s, want 0.009", got.DriftS)
	}
}

// TestRates follows the SEED manual's rule for factor and multiplier, and
// blockette 100 above it.
func TestRates(t *testing.T) {
	cases := []struct {
		factor, multiplier int16
		rate100            float32
		want               float64
	}{
		{100, 1, 0, 100}, {33, 3, 0, 99}, {330, -10, 0, 33}, {-10, 1, 0, 0.1}, {-60, 3, 0, 0.05}, {-5, -2, 0, 0.1},
		{100, 1, 99.99999, 100}, {0, 0, 200, 200}, {0, 1, 99.99, float64(float32(99.99))}, {1, 1, 0, 1},
		{-100, -1, 0.01, 0.01},
	}
	for _, k := range cases {
		r := invented(Int32, walk(12, 100, 1))
		r.Factor, r.Multiplier, r.Rate100 = k.factor, k.multiplier, k.rate100
		if r.Factor == 0 {
			r.Factor, r.Multiplier = k.factor, max(1, k.multiplier)
			r.Rate = 0
		}
		if got := trace(t, r.One(2)); got.Rate != k.want {
			t.Errorf("factor %d, multiplier %d, blockette 100 of %g: %g Hz, want %g", k.factor, k.multiplier, k.rate100, got.Rate, k.want)
		}
	}
	r := invented(Int32, walk(12, 100, 1))
	r.Rate = -0.02
	if got := trace(t, r.One(3)); got.Rate != 50 {
		t.Errorf("period of 0.02 s: %g Hz, want 50", got.Rate)
	}
}

func TestStart(t *testing.T) {
	x := walk(12, 100, 1)
	corrected, applied, finer, earlier := invented(Int32, x), invented(Int32, x), invented(Int32, x), invented(Int32, x)
	corrected.Correction = -12_345
	applied.Correction, applied.Activity = -12_345, 2
	finer.Start, finer.Microseconds = at.Add(37*time.Microsecond), 37
	earlier.Start, earlier.Microseconds = at.Add(-41*time.Microsecond), -41
	leap := invented(Int32, x).One(2)
	leap[26] = 60
	cases := map[string]struct {
		data []byte
		want time.Time
	}{
		"time correction":           {corrected.One(2), at.Add(-1_234_500 * time.Microsecond)},
		"time correction, applied":  {applied.One(2), at},
		"microseconds":              {finer.One(2), finer.Start},
		"microseconds below zero":   {earlier.One(2), earlier.Start},
		"second 60":                 {leap, at.Truncate(time.Minute).Add(time.Minute + 123_400*time.Microsecond)},
		"nanoseconds, in version 3": {func() []byte { r := invented(Int32, x); r.Start = at.Add(7); return r.One(3) }(), at.Add(7)},
		"last day of a leap year":   {func() []byte { r := invented(Int32, x); r.Start = lastOf(2040); return r.One(2) }(), lastOf(2040)},
		"little-endian, a day of 256": {func() []byte {
			r := invented(Int32, x)
			r.Little, r.Start = true, at.AddDate(0, 0, 193)
			return r.One(2)
		}(), at.AddDate(0, 0, 193)},
	}
	for name, k := range cases {
		if got := trace(t, k.data); !got.Start.Equal(k.want) {
			t.Errorf("%s: %v, want %v", name, got.Start, k.want)
		}
	}
}

func lastOf(year int) time.Time { return time.Date(year, 12, 31, 23, 59, 59, 0, time.UTC) }

func TestFlags(t *testing.T) {
	x := walk(12, 100, 1)
	r := invented(Int32, x)
	r.Activity, r.Quality = 1, 1|1<<1|1<<2|1<<3|1<<4|1<<7
	if got, want := trace(t, r.One(2)).Flags, Calibration|Saturated|Clipped|Spikes|Glitches|Padded|TimeDoubtful; got != want {
		t.Errorf("flags %b, want %b", got, want)
	}
	r.Flags = 3
	if got, want := trace(t, r.One(3)).Flags, Calibration|TimeDoubtful; got != want {
		t.Errorf("version 3: flags %b, want %b", got, want)
	}
	count := invented(Int32, x).One(2)
	count[39] = 4
	if got := trace(t, count).Flags; got != BlocketteCount {
		t.Errorf("flags %b, want BlocketteCount", got)
	}
	for _, e := range []Encoding{Steim1, Steim2} {
		swapped := invented(e, walk(400, 100, 5)).Series(2)
		swapped[53] = 0 // says little-endian
		if got := trace(t, swapped[:512]).Flags; got != WordsSwapped {
			t.Errorf("%v: flags %b, want WordsSwapped", e, got)
		}
	}
}

func TestIdentifiers(t *testing.T) {
	r := invented(Int32, walk(12, 100, 1))
	r.Location = ""
	blank, dashes := r.One(2), r.One(2)
	copy(dashes[13:], "--")
	v3 := r.One(3)
	f, err := Decode(t.Context(), append(append(blank, dashes...), v3...))
	if err != nil || len(f.Channels) != 1 || f.Channels[0].ID != (ID{"XX", "CULM", "", "HNE"}) || f.Channels[0].Traces[0].Repeated != 24 {
		t.Errorf("channels %+v, %v, want one of three records alike", f.Channels, err)
	}
	if got := f.Channels[0].ID.String(); got != "XX.CULM..HNE" {
		t.Errorf("String() = %s", got)
	}
}

// TestRecordsWithoutSamples passes over messages and empty records.
func TestRecordsWithoutSamples(t *testing.T) {
	log := invented(Text, nil).One(2)
	log[31] = 20
	empty := invented(Steim2, []float64{1}).One(2)
	empty[31] = 0
	data := append(append(log, empty...), invented(Int32, walk(12, 100, 1)).One(2)...)
	f, err := Decode(t.Context(), append(data, "end"...))
	if err != nil || f.Skipped != 2 || f.Trailing != 3 || len(f.Channels[0].Traces) != 1 {
		t.Errorf("%+v, %v", f, err)
	}
}

// TestAllocations counts those of a file of many records: none a record.
func TestAllocations(t *testing.T) {
	few, many := invented(Steim2, walk(2000, 3000, 1)).Series(2), invented(Steim2, walk(200_000, 3000, 1)).Series(2)
	count := func(data []byte) float64 {
		return testing.AllocsPerRun(5, func() {
			if _, err := Decode(t.Context(), data); err != nil {
				t.Fatal(err)
			}
		})
	}
	// The list of records grows by doubling.
	if a, b := count(few), count(many); b > a+20 {
		t.Errorf("%g allocations for %d records, %g for %d", b, len(many)/512, a, len(few)/512)
	}
}
