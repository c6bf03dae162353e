package fdsnxml

import (
	"errors"
	"slices"
	"strings"
	"testing"
)

// inventoryOf merges documents, a.xml and so on, each of one channel with the elements.
func inventoryOf(t *testing.T, channels ...string) *Inventory {
	t.Helper()
	v := &Inventory{}
	for i, elements := range channels {
		text := `<FDSNStationXML><Network code="XX"><Station code="CULM">` +
			`<Latitude>1</Latitude><Longitude>2</Longitude>` + strings.Repeat("\n", i+1) + elements + `</Station></Network></FDSNStationXML>`
		one, err := ReadStations(t.Context(), []byte(text))
		if err != nil || len(one.Channels) == 0 {
			t.Fatal(err, one)
		}
		v.Merge(one, string(rune('a'+i))+".xml")
	}
	return v
}

// epochOf is a channel with the elements behind its position.
func epochOf(dates, elements string) string {
	return `<Channel code="HNE" locationCode="00" ` + dates + `><Latitude>1</Latitude><Longitude>2</Longitude>` + elements + `</Channel>`
}

func sensitivityOf(value, unit string) string {
	return `<Response><InstrumentSensitivity><Value>` + value + `</Value><InputUnits><Name>` + unit + `</Name></InputUnits><OutputUnits><Name>counts</Name></OutputUnits></InstrumentSensitivity></Response>`
}

// What documents say of one channel counts together, in whatever order they come, and
// dates and the case of units make no difference.
func TestEpochsThatAgree(t *testing.T) {
	all := epochOf(`startDate="2035-01-01"`, `<Azimuth>90</Azimuth><Dip>-0</Dip><Depth>3</Depth><SampleRate>100</SampleRate>`+sensitivityOf("2e5", "M/S**2"))
	for name, others := range map[string][]string{
		"equal":                 {all},
		"another end":           {strings.Replace(all, "startDate", `endDate="2040-01-01" startDate`, 1)},
		"units otherwise":       {strings.NewReplacer("M/S**2", "m/s^2", "counts", "COUNT").Replace(all)},
		"a unit otherwise":      {strings.Replace(all, "M/S**2", "m/s/s", 1)},
		"spelled otherwise":     {strings.NewReplacer("M/S", "m/s", "-0<", "0<", "2e5", "200000").Replace(all)},
		"less":                  {epochOf("", `<Depth>3</Depth>`)},
		"each another part":     {epochOf("", `<Depth>3</Depth><Azimuth>90</Azimuth>`), epochOf("", `<Depth>3</Depth><Dip>0</Dip>`)},
		"stages of another one": {epochOf("", `<Depth>3</Depth><Response><Stage><StageGain><Value>199000</Value></StageGain></Stage></Response>`)},
	} {
		documents := append([]string{all}, others...)
		for range 2 {
			slices.Reverse(documents)
			c, err := inventoryOf(t, documents...).Lookup("XX", "CULM", "00", "HNE", day(2036, 1, 1, 0), day(2036, 1, 1, 1))
			if err != nil {
				t.Errorf("%s: %v", name, err)
				continue
			}
			if c.Sensitivity.Value != known(200000) || c.AzimuthDeg != known(90) || !c.DipDeg.Known || c.DipDeg.Value != 0 || c.DepthM != 3 || c.RateHz != 100 {
				t.Errorf("%s: %+v", name, c)
			}
		}
	}
}

// Documents that say different things are named, with all that differs.
func TestEpochsThatContradict(t *testing.T) {
	base := epochOf("", `<Azimuth>90</Azimuth><Dip>0</Dip><Depth>3</Depth>`+sensitivityOf("200000", "m/s**2"))
	other := func(pairs ...string) string { return strings.NewReplacer(pairs...).Replace(base) }
	for name, k := range map[string]struct {
		documents []string
		want      string
	}{
		"sensitivity":     {[]string{base, other("200000", "100000.5")}, "a.xml:2 and b.xml:3 say sensitivity 200000 counts per m/s**2 / 100000.5 counts per m/s**2"},
		"its unit":        {[]string{base, other("m/s**2", "CM/S**2")}, "a.xml:2 and b.xml:3 say sensitivity 200000 counts per m/s**2 / 200000 counts per cm/s**2"},
		"polynomial":      {[]string{base, epochOf("", `<Depth>3</Depth><Response><InstrumentPolynomial/></Response>`)}, "a.xml:2 and b.xml:3 say sensitivity 200000 counts per m/s**2 / a polynomial"},
		"azimuth and dip": {[]string{base, other(">90<", ">92.5<", "<Dip>0<", "<Dip>-90<")}, "a.xml:2 and b.xml:3 say azimuth 90° / 92.5°; dip 0° / -90°"},
		"position":        {[]string{base, other("<Longitude>2<", "<Longitude>-2<")}, "a.xml:2 and b.xml:3 say position 1°, 2° / 1°, -2°"},
		"100 m":           {[]string{base, other("<Longitude>2<", "<Longitude>2.00091<")}, "a.xml:2 and b.xml:3 say position 1°, 2° / 1°, 2.00091°"},
		"beyond rounding": {[]string{base, other("200000", "200201", ">90<", ">90.6<")}, "a.xml:2 and b.xml:3 say sensitivity 200000 counts per m/s**2 / 200201 counts per m/s**2; azimuth 90° / 90.6°"},
		"others": {[]string{other("<Depth>", "<Elevation>5</Elevation><SampleRate>100</SampleRate><Depth>"), other("<Depth>", "<Elevation>6</Elevation><SampleRate>200</SampleRate><Depth>")},
			"a.xml:2 and b.xml:3 say sample rate 100 Hz / 200 Hz"},
		"one of three is silent": {[]string{base, other("<Azimuth>90</Azimuth>", ""), other(">90<", ">80<")}, "a.xml:2, b.xml:3 and c.xml:4 say azimuth 90° / none / 80°"},
		"one document":           {[]string{base + "\n" + other(">90<", ">80<")}, "a.xml:2 and a.xml:3 say azimuth 90° / 80°"},
		"many": {[]string{base, other(">90<", ">1<"), other(">90<", ">2<"), other(">90<", ">3<"), other(">90<", ">4<"), other(">90<", ">5<"), other(">90<", ">6<"), other(">90<", ">7<")},
			"a.xml:2, b.xml:3, c.xml:4, d.xml:5, e.xml:6, f.xml:7, and 2 more say azimuth 90° / 1° / 2° / 3° / 4° / 5° / and 2 more"},
	} {
		_, err := inventoryOf(t, k.documents...).Lookup("XX", "CULM", "00", "HNE", day(2036, 1, 1, 0), day(2036, 1, 1, 1))
		if _, ok := errors.AsType[*ContradictionError](err); !ok || err.Error() != k.want {
			t.Errorf("%s: %v, want %s", name, err, k.want)
		}
	}
}

// What differs within rounding is taken alike in every order of the documents; heights,
// depths and gains that differ by more are a doubt.
func TestEpochsThatRound(t *testing.T) {
	base := epochOf(`startDate="2035-01-01"`, `<Elevation>211</Elevation><Depth>1</Depth><Azimuth>0</Azimuth><Dip>0</Dip><SampleRate>100</SampleRate>`+sensitivityOf("200000", "m/s**2"))
	other := func(pairs ...string) string { return strings.NewReplacer(pairs...).Replace(base) }
	for name, k := range map[string]struct {
		other, doubts string
		sensitivity   float64
		depth         float64
	}{
		"sensitivity": {other("200000", "199800.5"), "", 199800.5, 1},
		"rounding":    {other("<Latitude>1<", "<Latitude>1.000001<", ">2<", ">2.0008<", ">211<", ">211.4<", ">100<", ">100.05<", "<Azimuth>0<", "<Azimuth>359.6<"), "", 200000, 1},
		"depth":       {other("<Depth>1<", "<Depth>30<"), "a.xml:2 and b.xml:3 say depth 1 m / 30 m (30 m taken)", 200000, 30},
		"no depth":    {other("<Depth>1<", "<Depth>0<"), "a.xml:2 and b.xml:3 say depth 1 m / 0 m (1 m taken)", 200000, 1},
		"elevation":   {other(">211<", ">250<"), "a.xml:2 and b.xml:3 say elevation 211 m / 250 m (211 m taken)", 200000, 1},
		"later start": {other("2035", "2036", ">211<", ">250<"), "a.xml:2 and b.xml:3 say elevation 211 m / 250 m (250 m taken)", 200000, 1},
	} {
		first, err := inventoryOf(t, base, k.other).Lookup("XX", "CULM", "00", "HNE", day(2036, 1, 2, 0), day(2036, 1, 2, 1))
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if first.Doubts != k.doubts || first.Sensitivity.Value != known(k.sensitivity) || first.DepthM != k.depth {
			t.Errorf("%s: %q, sensitivity %v, depth %g", name, first.Doubts, first.Sensitivity.Value, first.DepthM)
		}
		second, err := inventoryOf(t, k.other, base).Lookup("XX", "CULM", "00", "HNE", day(2036, 1, 2, 0), day(2036, 1, 2, 1))
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		a, b := *first, *second
		a.Path, a.Doubts, b.Path, b.Doubts = "", "", "", ""
		if a != b {
			t.Errorf("%s: %+v in one order, %+v in the other", name, a, b)
		}
	}
}
