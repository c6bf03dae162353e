package kernel

import "testing"

// BenchmarkMarch is the stepping alone: one block of oscillators through 8000
// samples, 64 at a time as the solver does.
func BenchmarkMarch(b *testing.B) {
	const n, chunk = 8000, 64
	c := newCase(1, n)
	marks := make([]Mark, n/chunk+1)
	for _, form := range []struct {
		name  string
		march func(k int)
	}{
		{"slow", func(k int) { MarchSlow(&c.slow, &marks[k], &marks[k+1], c.ground[k*chunk:min((k+1)*chunk+2, n)]) }},
		{"train", func(k int) { MarchTrain(&c.train, &marks[k], &marks[k+1], c.ground[k*chunk:min((k+1)*chunk+2, n)]) }},
		{"fast", func(k int) { MarchFast(&c.fast, &marks[k], &marks[k+1], c.ground[k*chunk:min((k+1)*chunk, n)]) }},
	} {
		for _, name := range Names() {
			b.Run(form.name+"/"+name, func(b *testing.B) {
				use(b, name)
				for b.Loop() {
					marks[0] = c.start
					for k := range n / chunk {
						form.march(k)
					}
				}
				b.ReportMetric(Lanes*n*float64(b.N)/b.Elapsed().Seconds(), "osc-steps/s")
			})
		}
	}
}

// BenchmarkScreen is the comparison of 125 marks, one for each 64 samples.
func BenchmarkScreen(b *testing.B) {
	const n = 125
	c := newCase(1, n)
	marks, lines, flags := make([]Mark, n), make([]Line, n), make([]uint32, n)
	for _, name := range Names() {
		b.Run(name, func(b *testing.B) {
			use(b, name)
			for b.Loop() {
				ScreenPeaks(&c.screen, marks, lines, flags)
			}
			b.ReportMetric(Lanes*n*float64(b.N)/b.Elapsed().Seconds(), "values/s")
		})
	}
}
