package design

import (
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// checkMistake wants a *FileError that begins so.
func checkMistake(t *testing.T, what string, err error, want string) {
	t.Helper()
	if err == nil {
		t.Errorf("%s\nno mistake found, want %s", what, want)
		return
	}
	if _, ok := errors.AsType[*FileError](err); !ok || !strings.HasPrefix(filepath.ToSlash(err.Error()), want) {
		t.Errorf("%s\n%T %v, want %s", what, err, err, want)
	}
}

func TestReadFiles(t *testing.T) {
	for _, c := range []struct {
		file, name      string
		period, damping float64
		want            float64
		from, to        float64
	}{
		{"ground-c.toml", "Northwater, ground C", 1, 0.05, 0.25 * 1.15 * 2.5 * 0.6, 0, math.Inf(1)},
		{"annex.toml", "annex", 0, 0.02, 1.5 / 9.80665 * 1.3, 0, math.Inf(1)},
		{"vertical.toml", "Northwater, up and down", 0.1, 0.05, 0.2 * 0.45 * 3, 0, 4},
		{"two-parameters.toml", "Invented site", 2, 0.05, 0.3, 0, math.Inf(1)},
		{"site.toml", "Harbour study, 475 years", 0.4, 0.05, 6 / 9.80665, 0, 4},
		{"displacement.toml", "displacement", 1, 0.02, 0.05 * 4 * math.Pi * math.Pi / 9.80665, 0.5, 4},
	} {
		s, err := Read(filepath.Join("testdata", c.file))
		if err != nil {
			t.Error(err)
			continue
		}
		if from, to := s.Band(); s.Name() != c.name || from != c.from || to != c.to {
			t.Errorf("%s: name %q, band %v to %v s", c.file, s.Name(), from, to)
		}
		if got := s.PSAg(c.period, c.damping); !near(got, c.want, 4e-15) {
			t.Errorf("%s: %v g at %v s, want %v", c.file, got, c.period, c.want)
		}
	}
}

func TestMistakesInFiles(t *testing.T) {
	const en = "kind = 'en1998-1'\n"
	const asce = "kind = 'asce7'\n"
	for _, c := range []struct{ text, want string }{
		{"", "d.toml: kind: is missing; want \"en1998-1\", \"asce7\" or \"table\""},
		{"\nkind = 'ec8'", "d.toml:2: kind: want \"en1998-1\", \"asce7\" or \"table\", found \"ec8\""},
		{"kind = 8", "d.toml:1: kind: want \"en1998-1\", \"asce7\" or \"table\", found 8"},
		{"kind = ", "d.toml:1: "},
		{"kind = 'asce7'\nkind = 'table'", "d.toml:2: "},
		{en + "name = ''", "d.toml:2: name: is empty"},
		{en + "name = 3", "d.toml:2: name: want a text in quotes, found 3"},
		{en + `name = "a\u0007b"`, "d.toml:2: name: want at most 80 characters that can be printed, on one line"},
		{en + "name = '" + strings.Repeat("x", 81) + "'", "d.toml:2: name: want at most 80"},
		{en + "type = 1\nground = 'C'", "d.toml: agr_g: one of agr_g, in g, and agr_m_s2, in m/s², is needed"},
		{en + "type = 1\nground = 'C'\nagr_g = 0.2\nagr_m_s2 = 2", "d.toml:4: agr_g: one of"},
		{en + "type = 1\nground = 'C'\nagr_g = 20", "d.toml:4: agr_g: 20 is outside 0.001 to 5"},
		{en + "type = 1\nground = 'C'\nagr_g = nan", "d.toml:4: agr_g: NaN is outside 0.001 to 5"},
		{en + "type = 1\nground = 'C'\nagr_g = '0.2'", "d.toml:4: agr_g: want a number, found \"0.2\""},
		{en + "type = 1\nground = 'C'\nagr_m_s2 = 200", "d.toml:4: agr_m_s2: 200 is outside"},
		{en + "type = 1\nground = 'C'\nagr_g = 0.2\nimportance_factor = 0", "d.toml:5: importance_factor: 0 is outside 0.1 to 10"},
		{en + "type = 3\nground = 'C'\nagr_g = 0.2", "d.toml:2: type: want 1 or 2, found 3"},
		{en + "type = '1'\nground = 'C'\nagr_g = 0.2", "d.toml:2: type: want 1 or 2, found \"1\""},
		{en + "ground = 'C'\nagr_g = 0.2", "d.toml: type: is missing; want 1 or 2"},
		{en + "type = 1\nground = 'F'\nagr_g = 0.2", "d.toml:3: ground: want \"A\", \"B\", \"C\", \"D\" or \"E\", found \"F\""},
		{en + "type = 1\nagr_g = 0.2", "d.toml: ground: is missing; want \"A\", \"B\""},
		{en + "agr_g = 0.2\nsoil = 'C'\ntype = 1", "d.toml:3: soil: unknown key; known here are name, kind, direction"},
		{en + "sds_g = 0.2", "d.toml:2: sds_g: unknown key; known here are"},
		{en + "direction = 'up'", "d.toml:2: direction: want \"horizontal\" or \"vertical\", found \"up\""},
		{en + "direction = 'vertical'\ntype = 1\nground = 'C'\nagr_g = 0.2", "d.toml:4: ground: unknown key; known here are"},
		{en + "agr_g = 0.2\nparameters = 3", "d.toml:3: parameters: want a table such as"},
		{en + "agr_g = 0.2\ntype = 1\nparameters = {s = 1}", "d.toml:3: type: not beside parameters, which stand for it"},
		{en + "agr_g = 0.2\n[parameters]\ns = 1\ntb_s = 0.2\ntc_s = 0.6", "d.toml:3: parameters.td_s: is missing"},
		{en + "agr_g = 0.2\n[parameters]\ns = 1\ntb_s = 0.2\ntc_s = 0.1\ntd_s = 2", "d.toml:6: parameters.tc_s: 0.1 s is before tb_s"},
		{en + "agr_g = 0.2\n\n[parameters]\ns = 1\ntb_s = 0.2\ntc_s = 0.6\ntd_s = 0.5", "d.toml:8: parameters.td_s: 0.5 s is before tc_s"},
		{en + "agr_g = 0.2\nparameters = {s = 1, tb_s = 0.2, tc_s = 0.6, td_s = 2, te_s = 6}", "d.toml:3: parameters.tf_s: is missing"},
		{en + "agr_g = 0.2\nparameters = {s = 1, tb_s = 0.2, tc_s = 0.6, td_s = 2, te_s = 6, tf_s = 5}", "d.toml:3: parameters.tf_s: 5 s is not after te_s"},
		{en + "agr_g = 0.2\nparameters = {s = 1, tb_s = 0.2, tc_s = 0.6, td_s = 2, te_s = 3, tf_s = 9}", "d.toml:3: parameters.te_s: 3 is outside 4 to 100"},
		{en + "agr_g = 0.2\n[parameters]\ns = 1\ntb = 0.2", "d.toml:5: parameters.tb: unknown key; known here are s, tb_s"},
		{asce + "sds_g = 1\nsd1_g = 0.6", "d.toml: tl_s: is missing"},
		{asce + "sds_g = 1\nsd1_g = 0.6\ntl_s = 0.5", "d.toml:4: tl_s: 0.5 s is before SD1/SDS = 0.6 s"},
		{asce + "sds_g = 1\nsd1_g = 0.6\ntl_s = 8\neta = true", "d.toml:5: eta: want \"en1998\", found true"},
		{"kind = 'table'\nfile = 'site.csv'", "d.toml: damping: is missing: the damping ratio"},
		{"kind = 'table'\ndamping = 5\nfile = 'site.csv'", "d.toml:2: damping: want a damping ratio such as \"5%\" or 0.05, up to 90 %, found 5"},
		{"kind = 'table'\ndamping = '5'\nfile = 'site.csv'", "d.toml:2: damping: want a damping ratio such as \"5%\" or 0.05, up to 90 %, found \"5\""},
		{"kind = 'table'\ndamping = '5%'", "d.toml: file: is missing"},
		{"kind = 'table'\ndamping = '5%'\nfile = 'site.csv'", "d.toml:3: file: site.csv: no such file"},
		{"kind = 'table'\ndamping = '5%'\nfile = 'site.csv'\nvalue_unit = 'ft'", "d.toml:4: value_unit: want \"g\", \"m/s2\""},
	} {
		_, err := parse("d.toml", []byte(c.text), noFile)
		checkMistake(t, c.text, err, c.want)
	}
}

func TestFilesThatCannotBeRead(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
		return path
	}
	missing := filepath.Join(dir, "none.toml")
	_, err := Read(missing)
	checkMistake(t, "a missing file", err, filepath.ToSlash(missing)+": ")
	if !errors.Is(err, fs.ErrNotExist) || strings.Count(err.Error(), "none.toml") != 1 {
		t.Errorf("a missing file: %v", err)
	}
	_, err = Read(dir)
	checkMistake(t, "a folder", err, filepath.ToSlash(dir)+": is no file")
	large := write("large.toml", strings.Repeat("#\n", maxDescription/2+1))
	_, err = Read(large)
	checkMistake(t, "a large file", err, filepath.ToSlash(large)+": is larger than 65536 bytes")
	lost := write("lost.toml", head)
	_, err = Read(lost)
	checkMistake(t, "a lost table", err, filepath.ToSlash(lost)+":2: file: ")
	if !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("a lost table: %v", err)
	}
}

func TestDampingsAsWritten(t *testing.T) {
	for text, want := range map[string]float64{
		"'5%'": 0.05, "'2.5 %'": 0.025, "'0.7%'": 0.007, "0.05": 0.05, "'0.05'": 0.05, "0": 0, "'0%'": 0,
	} {
		s := tableOf(t, "kind = 'table'\nfile = 'x.csv'\ndamping = "+text, "period_s,psa_g\n1,0.2\n2,0.1\n")
		if got, fixed := s.Damping(); got != want || !fixed {
			t.Errorf("%s: %v, fixed %v", text, got, fixed)
		}
		if got := s.PSAg(1, want); got != 0.2 {
			t.Errorf("%s: PSA %v at its own damping", text, got)
		}
	}
}

func TestScaledTable(t *testing.T) {
	s := tableOf(t, head+"eta = 'en1998'", "period_s,psa_g\n1,0.2\n2,0.1\n")
	if got := s.PSAg(2, 0.3); !near(got, 0.055, 1e-15) {
		t.Errorf("30 %%: %v", got)
	}
	s = tableOf(t, "kind = 'table'\nfile = 'x.csv'\ndamping = '2%'\neta = 'en1998'", "period_s,psa_g\n1,0.2\n2,0.1\n")
	if got := s.PSAg(2, 0.05); !near(got, 0.1*math.Sqrt(0.7), 1e-15) {
		t.Errorf("from 2 to 5 %%: %v", got)
	}
}
