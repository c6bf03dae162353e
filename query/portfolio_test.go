package query

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/query/modal"
)

func portfolioFile(t *testing.T, name, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func readPortfolio(t *testing.T, name, text string) []PortfolioStructure {
	t.Helper()
	out, err := ReadPortfolio(portfolioFile(t, name, text))
	if err != nil {
		t.Fatal(err)
	}
	return out
}

const csvPortfolio = "\ufeff# invented\r\nid;period;damping;weight;height_m;period_uncertainty;max_displacement;max_drift_ratio;mode1_period_s;mode1_damping;mode1_mass_ratio;mode1_height;mode2_period_s;mode2_damping;mode2_mass_ratio;mode2_height\r\n" +
	"tank;3141.592653589793ms;2%;9806.65N;3;50%;0.1m;2%;;;;;;;;\r\n" +
	"frame;;;;12;;;;3.141592653589793;0.02;0.75;9m;1.5707963267948966;5%;20%;4m\r\n"

const tomlPortfolio = `# invented
[[structure]]
id = "tank"
period = "3141.592653589793ms"
damping = 0.02
weight = "9806.65N"
height_m = 3
period_uncertainty = 0.5
max_displacement = "10cm"
max_drift_ratio = 0.02

[[structure]]
id = "frame"
height = "12m"
[[structure.mode]]
period = "3.141592653589793s"
damping = "2%"
mass_ratio = "75%"
height = "900cm"
[[structure.mode]]
period_s = 1.5707963267948966
damping = 5e-2
mass_ratio = 0.2
height = "4m"
`

func TestPortfolioFiles(t *testing.T) {
	mass, height, roof := 1000.0, 3.0, 12.0
	want := []PortfolioStructure{
		{
			ID: "tank", Structure: Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: &mass, HeightM: &height},
			BandWidth: 0.5, Limits: Limits{DisplacementM: ptr(0.1), DriftRatio: ptr(0.02)},
		},
		{
			ID: "frame", Structure: Structure{PeriodS: math.Pi, Damping: 0.02, HeightM: &roof},
			Modes: []Mode{{math.Pi, 0.02, 0.75, ptr(9.0)}, {math.Pi / 2, 0.05, 0.2, ptr(4.0)}},
		},
	}
	for name, text := range map[string]string{"p.csv": csvPortfolio, "p.toml": tomlPortfolio} {
		if got := readPortfolio(t, name, text); !reflect.DeepEqual(got, want) {
			t.Errorf("%s: %+v, want %+v", name, got, want)
		}
	}
}

// Mistakes are named with file, line and name, and all of a file at once.
func TestPortfolioMistakes(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "p: holds nothing"},
		{"id,period\n", "p: holds no structure"},
		{"id,colour\na,red\n", `p:1: unknown name "colour"; known: id, name, period`},
		{"id,period,damping\na,1.2,5%\n", `p:2: period: "1.2" has no unit`},
		{"id,period_s,damping\na,1.2,5%\na,1,5%\n", `p:3: id: "a" stands in line 2 too`},
		{"id,period_s,damping\n,1.2,5%\n", "p:2: id: is missing"},
		{"id,period_s,period,damping\na,1,2s,5%\n", "p:2: period: period is given twice"},
		{"id,period_s,damping\na,x,5%\nb,-1,5%\nc,1,200%\n", "p:3: period_s: \"-1s\" is not a positive number in range\np:4: damping: 2 is 200%"},
		{"id,period_s,damping,max_base_shear_kn\na,1,5%,3\n", "p:2: max_base_shear: needs a mass or a weight"},
		{"id,period_s,damping,max_drift_ratio\na,1,5%,1%\n", "p:2: max_drift_ratio: needs the height"},
		{"id,period_s,damping,latitude\na,1,5%,10\n", "p:2: latitude: latitude and longitude belong together"},
		{"id,period_s,damping,latitude,longitude\na,1,5%,100,1\n", "p:2: latitude: 100 is not within ±90 degrees"},
		{"id,mode1_period_s,mode1_damping\na,1,5%\n", "p:2: mode 1: has no mass_ratio"},
		{"id,period_s,mode1_period_s,mode1_damping,mode1_mass_ratio\na,1,1,5%,0.5\n", "p:2: period_s: is not taken where there are modes"},
		{"id,mode1_period_s,mode1_damping,mode1_mass_ratio,mode2_period_s,mode2_damping,mode2_mass_ratio\na,1,5%,0.6,2,5%,0.5\n", "which is over 1"},
		{"id,period_uncertainty,mode1_period_s,mode1_damping,mode1_mass_ratio\na,10%,1,5%,0.6\n", "p:2: period_uncertainty: is not taken where there are modes"},
		{"id,period_s,damping,weight_kn,max_base_shear_kn\na,1,5%,1,0\n", "p:2: max_base_shear_kn: \"0kN\" is not a positive number"},
		{"id,period_s,damping,period_uncertainty\na,1,5%,10\n", "p:2: period_uncertainty: 10 is out of range"},
		{"id;period_s;damping\na;0,5;5%\n", `p:2: period_s: "0,5" is not a plain number such as 1.35`},
		{"id,period_s,damping\na,inf,5%\n", `p:2: period_s: "inf" is not a plain number`},
		{"id,period_s\na,1\n", "p:2: damping: is missing"},
		{"id,period_s,damping,,\na,1,5%,,3\n", "p:2: \"3\" stands in a column without a name"},
		{"id,period_s,damping\nSch\xfc,1,5%\n", "p:2: is not UTF-8"},
		{"\xff\xfei\x00d\x00", "p: is UTF-16; save it as UTF-8"},
		{"[[structure]]\nid = \"a\"\nperiod_s = 1\ndamping = 0.05\nweight_kn = 1_000\nmax_base_shear_kn = \"x\"\n", "p:6: max_base_shear_kn: "},
		{"structure = [{id = \"a\"}]\n", "p:1: structure: want [[structure]] tables"},
		{"id,mode0_period_s\na,1\n", "modes 1 to 50"},
		{"id,period_s,damping\na,1,5%,3\n", "p:2: wrong number of fields"},
		{"[[structure]]\nid = \"a\"\nperiod = \"1s\"\ndamping = \"5%\"\ncolour = 1\n", `p:5: unknown name "colour"`},
		{"[[structure]]\nid = \"a\"\nperiod = [1]\n", "p:3: period: want a text or a number"},
		{"[structure]\nid = \"a\"\n", "p:1: structure: want [[structure]] tables"},
		{"[[structure]]\nid = \n", "p:2: "},
	} {
		_, err := ReadPortfolio(portfolioFile(t, "p", c.text))
		if !isUsage(err) || !strings.Contains(strings.ReplaceAll(err.Error(), filepath.Dir(pathIn(err.Error()))+"/", ""), c.want) {
			t.Errorf("%q: %v, want %s", c.text, err, c.want)
		}
	}
	if _, err := ReadPortfolio(filepath.Join(t.TempDir(), "none")); !isUsage(err) || strings.Count(err.Error(), "none") != 1 {
		t.Errorf("no file: %v", err)
	}
}

// pathIn is the path that a message begins with.
func pathIn(message string) string {
	_, rest, _ := strings.Cut(message, "structures: ")
	path, _, _ := strings.Cut(rest, ":")
	return path
}

func askPortfolio(t *testing.T, store *db.Store, q PortfolioQuestion) *PortfolioAnswer {
	t.Helper()
	a, err := q.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// A row is what a question for the structure alone answers, in every digit.
func TestPortfolioAgreesWithDemand(t *testing.T) {
	store := newStore(t, handGrid, append(sevenRecords(), handRecords()...))
	structures := readPortfolio(t, "p.csv", "id,period_s,damping,mass_kg,height_m,period_uncertainty\n"+
		"a,3.141592653589793,2%,1000,3,\nb,3.0,2%,1000,,40%\nc,1.1,7%,,,\nd,2,5%,500,2,10%\n")
	for _, selection := range []Selection{{}, {Component: ComponentEach, Balance: BalanceEvent}} {
		a := askPortfolio(t, store, PortfolioQuestion{Selection: selection, Structures: structures})
		for i, s := range structures {
			d, err := DemandQuestion{Selection: selection, Structure: s.Structure, BandWidth: s.BandWidth}.Ask(t.Context(), store)
			if err != nil {
				t.Fatal(err)
			}
			row := a.Rows[i]
			if got, want := mustJSON(t, d.demandFields(row.Quantities, row.Band)), mustJSON(t, d.demandFields(d.Quantities, d.Band)); string(got) != string(want) {
				t.Errorf("%s: %s, want %s", s.ID, got, want)
			}
		}
	}
}

// At ω = 2 and 4 rad/s the SD at 2 % are 0.02·k and 0.01·k m for k = 1 … 7, so mode 1 has
// V = 0.75·1000·4·0.02·k = 60·k N and mode 2 V = 0.2·1000·16·0.01·k = 32·k N. Over the
// seven motions the median is that of k = 4: SRSS 4·68 = 272 N, since 60² + 32² = 68²; the
// moments 540·k and 128·k N·m.
func TestModesByHand(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	structures := readPortfolio(t, "p.csv", "id,mass_kg,mode1_period,mode1_damping,mode1_mass_ratio,mode1_height,mode2_period,mode2_damping,mode2_mass_ratio,mode2_height\n"+
		"f,1000,3.141592653589793s,2%,0.75,9m,1.5707963267948966s,2%,0.2,4m\n")
	a := askPortfolio(t, store, PortfolioQuestion{Structures: structures})
	rho := modal.Coefficient(math.Pi, 0.02, math.Pi/2, 0.02)
	for name, want := range map[string]float64{
		"sd_m":                0.08,
		"base_shear_srss_n":   4 * 68,
		"base_shear_n":        4 * math.Sqrt(60*60+32*32+2*rho*60*32),
		"base_moment_srss_nm": 4 * math.Hypot(540, 128),
		"base_moment_nm":      4 * math.Sqrt(540*540+128*128+2*rho*540*128),
	} {
		if x := quantity(t, a.Rows[0].Quantities, name); !near(x.Percentiles[1], want) || x.Count != 7 || x.Governing != "D6" {
			t.Errorf("%s: %+v, want %v", name, *x, want)
		}
	}
	if !strings.Contains(a.Remarks(), "the combination of peaks is an estimate") {
		t.Errorf("remarks %q", a.Remarks())
	}
}

// SD is 0.02·k m: a limit of 0.1 m is exceeded by two of seven, a drift of 4 % at 3 m, 0.12 m,
// by one, and a base shear of 1000·4·SD = 80·k N over 200 N by five.
func TestLimitsByHand(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	structures := readPortfolio(t, "p.csv", "id,period_s,damping,mass_kg,height_m,max_displacement_m,max_drift_ratio,max_base_shear_n\n"+
		"a,3.141592653589793,2%,1000,3,0.1,4%,200\n")
	a := askPortfolio(t, store, PortfolioQuestion{Structures: structures, Percentiles: []float64{50, 80}})
	want := []LimitRatio{
		{"displacement", 0.1, []float64{0.8, 1.16}, 1.4, 2.0 / 7, 2, 7, "D6"},
		{"drift", 0.04, []float64{0.08 / 0.12, 0.116 / 0.12}, 0.14 / 0.12, 1.0 / 7, 1, 7, "D6"},
		{"base_shear", 200, []float64{1.6, 2.32}, 2.8, 5.0 / 7, 5, 7, "D6"},
	}
	for i, got := range a.Rows[0].Limits {
		w := want[i]
		if got.Name != w.Name || !near(got.Limit, w.Limit) || !near(got.Percentiles[0], w.Percentiles[0]) || !near(got.Percentiles[1], w.Percentiles[1]) || !near(got.Max, w.Max) || !near(got.Above, w.Above) || got.Count != w.Count || got.CountAbove != w.CountAbove || got.Governing != w.Governing {
			t.Errorf("%+v, want %+v", got, w)
		}
	}
	if worst := a.Rows[0].worst(a.Percentiles); worst.Name != "base_shear" || !near(worst.ratio, 2.32) || worst.percent != 80 {
		t.Errorf("worst %+v", worst)
	}
	// A percentile that seven do not support gives way to the highest that they do.
	a = askPortfolio(t, store, PortfolioQuestion{Structures: structures, Percentiles: []float64{50, 95}})
	if worst := a.Rows[0].worst(a.Percentiles); worst.Name != "base_shear" || !near(worst.ratio, 1.6) || worst.percent != 50 {
		t.Errorf("worst %+v", worst)
	}
}

// Between periods of the grid ln SD is straight in ln T, between dampings in ln(5 % + ζ):
// SD at 2 % doubles from π/2 to π s, so that it is √2 times as much at π/√2 s.
func TestGridInterpolation(t *testing.T) {
	store := newStore(t, handGrid, faint(sevenRecords()))
	middle := math.Sqrt(0.07*0.1) - 0.05 // half the way from 2 to 5 %, where SD halves
	text := fmt.Sprintf("id,period_s,damping\non,%v,2%%\nbetween,%v,2%%\ndamped,%v,%v\n", math.Pi, math.Pi/math.Sqrt2, math.Pi, middle)
	q := PortfolioQuestion{Structures: readPortfolio(t, "p.csv", text), Ordinates: OrdinatesGrid}
	a := askPortfolio(t, store, q)
	for i, want := range []float64{0.08, 0.04 * math.Sqrt2, 0.08 / math.Sqrt2} {
		if x := quantity(t, a.Rows[i].Quantities, "sd_m"); math.Abs(x.Percentiles[1]/want-1) > 1e-12 {
			t.Errorf("%s: %v, want %v", q.Structures[i].ID, x.Percentiles[1], want)
		}
	}
	// The samples have nothing to do with the invented ordinates: the error says so.
	if a.Error == nil || a.Error.Oscillators != 2 || a.Error.Motions != 7 || !(a.Error.Median > 1) {
		t.Errorf("error %+v", a.Error)
	}
	for _, c := range []struct{ text, want string }{
		{"id,period_s,damping\nlong,30,2%\n", "long: the period 30 s is outside the grid's"},
		{"id,period_s,damping\nloose,2,9%\n", "loose: the damping 9% is outside the grid's"},
	} {
		q.Structures = readPortfolio(t, "p.csv", c.text)
		if _, err := q.Ask(t.Context(), store); !isUsage(err) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v, want %s", err, c.want)
		}
	}
}

// Parts of a portfolio, as memory allows, answer like the whole.
func TestPortfolioInParts(t *testing.T) {
	var plans []plan
	structures := readPortfolio(t, "p.csv", "id,period_s,damping\na,1,2%\nb,2,2%\nc,1,2%\nd,3,2%\n")
	q := PortfolioQuestion{Structures: structures}
	plans, err := q.plans(&handGrid)
	if err != nil {
		t.Fatal(err)
	}
	var parts []string
	for from := 0; from < len(plans); {
		oscillators, to := gather(plans, from, 2)
		parts = append(parts, fmt.Sprint(len(oscillators), plans[from].at, to))
		from = to
	}
	if want := []string{"2 [0] 2", "2 [0] 4"}; !reflect.DeepEqual(parts, want) {
		t.Errorf("parts %v, want %v", parts, want)
	}
}

func TestPortfolioIsWritten(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	structures := readPortfolio(t, "p.csv", "id,name,period_s,damping,mass_kg,height_m,period_uncertainty,max_displacement_m\n"+
		"=cmd(),Northwater,3.141592653589793,2%,1000,3,10%,0.1\nb,,2,2%,,,,\n")
	a := askPortfolio(t, store, PortfolioQuestion{Structures: structures, Extras: Extras{Design: readDesign(t, flat)}})
	rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsSI))).ReadAll()
	if err != nil || len(rows) != 3 {
		t.Fatalf("%d rows, %v", len(rows), err)
	}
	at := func(row int, name string) string {
		for i, column := range rows[0] {
			if column == name {
				return rows[row][i]
			}
		}
		t.Fatalf("no column %s in %v", name, rows[0])
		return ""
	}
	if at(1, "id") != "'=cmd()" || at(1, "sd_m_p50") != "0.08" || at(2, "base_shear_n_p50") != "" || at(2, "band_sd_m_p50") != "" || at(1, "governing_limit") != "displacement" || at(1, "governing") != "D6" {
		t.Errorf("CSV %v", rows)
	}
	var got struct {
		Ordinates  string
		Structures []struct {
			ID         string
			Ratio      *float64
			Quantities map[string]*struct{ Design struct{ Value *float64 } }
			Band       *struct {
				FromS float64 `json:"from_s"`
			}
			Limits map[string]struct {
				ShareAbove *float64 `json:"share_above"`
			}
		}
	}
	if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsSI)), &got); err != nil {
		t.Fatal(err)
	}
	s := got.Structures
	if got.Ordinates != "exact" || len(s) != 2 || s[0].Ratio == nil || s[0].Band == nil || s[0].Limits["displacement"].ShareAbove == nil ||
		s[0].Quantities["psa_g"].Design.Value == nil || s[1].Band != nil || s[1].Ratio != nil {
		t.Errorf("JSON %+v", got)
	}
	if table := written(t, a, FormatTable, UnitsUS); !strings.Contains(table, "Demand on 2 structures, exact ordinates; where the period is uncertain") || !strings.Contains(table, "kip·in") {
		t.Errorf("table\n%s", table)
	}
}
