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
		"depth":           {[]string{base, other("<Depth>3</Depth>", "")}, "a.xml:2 and b.xml:3 say depth 3 m / 0 m"},
		"others": {[]string{other("<Depth>", "<Elevation>5</Elevation><SampleRate>100</SampleRate><Depth>"), other("<Depth>", "<Elevation>6</Elevation><SampleRate>200</SampleRate><Depth>")},
			"a.xml:2 and b.xml:3 say elevation 5 m / 6 m; sample rate 100 Hz / 200 Hz"},
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
