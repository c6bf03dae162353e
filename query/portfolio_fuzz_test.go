package query

import "testing"

// FuzzPortfolio: no text breaks the reader of structures, and what it accepts is complete.
func FuzzPortfolio(f *testing.F) {
	f.Add([]byte(csvPortfolio))
	f.Add([]byte(tomlPortfolio))
	f.Add([]byte("id\tperiod_s\tdamping\na\t1\t5%\n"))
	f.Add([]byte("[[structure.mode]]\nperiod = 1\n[[structure]]\n[structure.x]\n"))
	f.Add([]byte("id,mode1_period_s,mode51_period_s\n\"a\nb\",1,"))
	f.Fuzz(func(t *testing.T, text []byte) {
		drafts, err := parseDrafts(text)
		if err != nil {
			return
		}
		for _, d := range drafts {
			s, err := d.structure()
			if err != nil {
				continue
			}
			if s.ID == "" || !(s.PeriodS > 0) || !(s.Damping >= 0 && s.Damping < 1) || !(s.BandWidth >= 0 && s.BandWidth < 1) {
				t.Errorf("%q gives %+v", text, s)
			}
			for _, m := range s.Modes {
				if !(m.PeriodS > 0 && m.MassRatio > 0 && m.MassRatio <= 1) {
					t.Errorf("%q gives %+v", text, m)
				}
			}
		}
	})
}
