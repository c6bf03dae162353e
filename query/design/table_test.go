package design

import (
	"math"
	"strings"
	"testing"
)

// withTable reads a description whose table is rows.
func withTable(text, rows string) (Spectrum, error) {
	return parse("folder/design.toml", []byte(text), func(path string, _ int64) ([]byte, error) { return []byte(rows), nil })
}

func tableOf(t *testing.T, text, rows string) Spectrum {
	t.Helper()
	s, err := withTable(text, rows)
	if err != nil {
		t.Fatalf("%v in\n%s", err, rows)
	}
	return s
}

const head = "kind = 'table'\nfile = 'site.csv'\ndamping = '5%'\n"

func TestTableAtAndBetweenPoints(t *testing.T) {
	s := tableOf(t, head, "period_s,psa_g\n0,0.2\n0.1,0.5\n0.4,0.5\n1,0.2\n3,0.0123\n")
	for _, p := range []struct{ period, want float64 }{
		{0, 0.2}, {0.1, 0.5}, {0.4, 0.5}, {1, 0.2}, {3, 0.0123},
	} {
		if got := s.PSAg(p.period, 0.05); got != p.want {
			t.Errorf("at the point %v s: %v, want %v", p.period, got, p.want)
		}
	}
	for _, p := range []struct{ period, want float64 }{
		{0.025, 0.275}, {0.05, 0.35}, // straight behind 0
		{0.2, 0.5},
		{0.4 * math.Sqrt(2.5), math.Sqrt(0.1)}, // half the way by logarithm
		{math.Sqrt(3), math.Sqrt(0.2 * 0.0123)},
	} {
		if got := s.PSAg(p.period, 0.05); !near(got, p.want, 4e-15) {
			t.Errorf("%v s: %v, want %v", p.period, got, p.want)
		}
	}
	for _, period := range []float64{-0.1, 3.0001, math.NaN(), math.Inf(1)} {
		if got := s.PSAg(period, 0.05); !math.IsNaN(got) {
			t.Errorf("%v s: %v, want NaN", period, got)
		}
	}
	for _, damping := range []float64{0, 0.02, -1, 1, math.NaN()} {
		if got := s.PSAg(1, damping); !math.IsNaN(got) {
			t.Errorf("damping %v: %v, want NaN", damping, got)
		}
	}
	if from, to := s.Band(); from != 0 || to != 3 {
		t.Errorf("band %v to %v s", from, to)
	}
}

// A straight line of logarithms is met exactly by any points on it: 0.3/T is.
func TestTableKeepsPowersOfPeriod(t *testing.T) {
	s := tableOf(t, head, "period_s,psa_g\n0.2,1.5\n0.7,0.42857142857142857\n5,0.06\n")
	for period := 0.2; period < 5; period += 0.013 {
		if got := s.PSAg(period, 0.05); !near(got, 0.3/period, 1e-14) {
			t.Errorf("%v s: %v, want %v", period, got, 0.3/period)
		}
	}
}

// One spectrum in all units, by the definitions PSV = PSA·T/2π and
// SD = PSA·(T/2π)²: PSA of 1 m/s² at T = 2π s is PSV of 1 m/s and SD of 1 m.
func TestUnitsOfTables(t *testing.T) {
	const one = 1 / 9.80665
	twoPi := "6.283185307179586"
	for _, c := range []struct{ text, rows string }{
		{"", "period_s,psa_m_s2\n1,2\n" + twoPi + ",1\n"},
		{"", "T [s];PSA [m/s²]\n1;2\n" + twoPi + ";1\n"},
		{"", "Period (sec)\tSa (Gal)\n1\t200\n" + twoPi + "\t100\n"},
		{"", "period_ms,psa_cm_s2\n1000,200\n6283.185307179586,100\n"},
		{"", "period_s,psa_g\n1,2\n" + twoPi + ",0.10197162129779283\n"},
		{"", "period_s,psv_m_s\n1,2\n" + twoPi + ",1\n"},
		{"", "period_s,psv (cm/s)\n1,2\n" + twoPi + ",100\n"},
		{"", "period_s,sd_m\n1,0.2\n" + twoPi + ",1\n"},
		{"", "period_s,sd_cm\n1,20\n" + twoPi + ",100\n"},
		{"", "T_s,SD_mm\n1,20\n" + twoPi + ",1000\n"},
		{"", "period_s,value,unit\n1,0.2,m\n" + twoPi + ",1,m\n"},
		{"period_unit = 's'\nvalue_unit = 'm/s2'", "1,2\n" + twoPi + ",1\n"},
		{"period_unit = 'ms'\nvalue_unit = 'm'", "T,SD\n1000,0.2\n6283.185307179586,1\n"},
		{"value_unit = 'cm/s2'", "\ufeffperiod_s,value,,\r\n# lines\r\n\r\n1,2,,\r\n" + twoPi + ",100,,\r\n"},
	} {
		s := tableOf(t, head+c.text, c.rows)
		_, to := s.Band()
		if !near(to, 2*math.Pi, 1e-15) {
			t.Errorf("%q: band to %v s", c.rows, to)
		}
		if got := s.PSAg(to, 0.05); !near(got, one, 4e-15) {
			t.Errorf("%q: %v g, want %v", c.rows, got, one)
		}
	}
}

func TestMistakesInTables(t *testing.T) {
	for _, c := range []struct{ text, rows, want string }{
		{"", "", "site.csv: 0 points; two at least are needed"},
		{"", "period_s,psa_g\n1,0.2\n", "site.csv: 1 points; two at least are needed"},
		{"", "1,0.2\n2,0.1\n", "site.csv:1: the table states no unit"},
		{"", "period_s,psa\n1,0.2\n2,0.1\n", "site.csv:2: the table states no unit"},
		{"", "period_s,psa_g\n1,0.2\n# no\n0.5,0.1\n", "site.csv:4: period: 0.5 s is not above the one before, 1 s"},
		{"", "period_s,psa_g\n1,0.2\n1,0.1\n", "site.csv:3: period: 1 s is not above"},
		{"", "period_s,psa_g\n-1,0.2\n1,0.1\n", "site.csv:2: period: -1 s is outside 0 to 1000 s"},
		{"", "period_s,psa_g\n1,0\n2,0.1\n", "site.csv:2: value: 0 g is a PSA of 0 g"},
		{"", "period_s,psa_g\n1,980\n2,490\n", "site.csv:2: value: 980 g is a PSA of 980 g at 1 s, outside"},
		{"", "period_s,psa_g\n1,NaN\n2,0.1\n", `site.csv:2: value: "NaN" is no number`},
		{"", "period_s;psa_g\n0,5;0,2\n", `site.csv:2: period: "0,5" is no number with a decimal point`},
		{"period_unit = 's'\nvalue_unit = 'g'", "0,5;0,2\n1;2\n", `site.csv:1: period: "0,5" is no number with a decimal point`},
		{"", "period_s,psa_g\n1\n", "site.csv:2: 1 columns; want a period and a value"},
		{"", "period_s,psa_g\n1,2,3\n", "site.csv:2: 3 columns; want a period and a value"},
		{"", "period_s,h1_g,h2_g\n1,2,3\n", "site.csv:1: 3 columns; want a period and a value, perhaps a third column unit"},
		{"", "frequency_hz,psa_g\n1,0.2\n2,0.1\n", `site.csv:1: column "frequency_hz": frequencies are not read, give periods`},
		{"", "T [min],psa_g\n1,0.2\n", `site.csv:1: column "T [min]": unknown unit; want "s" or "ms"`},
		{"value_unit = 'g'", "period_s,psa_m_s2\n1,0.2\n", `site.csv:1: column "psa_m_s2" is in m/s2, but g is stated`},
		{"", "period_s,value,unit\n1,0.2,g\n2,0.1,m\n", "site.csv:3: the row is in m, but g is stated"},
		{"", "period_s,value,unit\n1,0.2\n", "site.csv:2: the row has no unit"},
		{"", "period_s,value,unit\n1,0.2,ft\n", `site.csv:2: unknown unit "ft"; want "g", "m/s2"`},
		{"", "period_s,sd_m\n0,0.2\n1,0.3\n", "site.csv:2: period: 0 s has no value in m"},
		{"", "period_s,psa_g\n1,\"0.2\n2,0.1\n", "site.csv:"},
	} {
		_, err := withTable(head+c.text, c.rows)
		checkMistake(t, c.rows, err, strings.Replace(c.want, "site.csv", "folder/site.csv", 1))
	}
}
