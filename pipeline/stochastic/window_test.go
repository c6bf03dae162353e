package stochastic

import "testing"

func TestWindow(t *testing.T) {
	for _, w := range []Window{StandardWindow(), {Epsilon: 0.5, Eta: 0.2, Stretch: 1}} {
		near(t, "maximum", w.At(w.Epsilon), 1, 1e-12)
		near(t, "end", w.At(1), w.Eta, 1e-12)
		for _, fraction := range []float64{-1, 0, 1.0001} {
			if v := w.At(fraction); v != 0 {
				t.Errorf("At(%g) = %g, want 0", fraction, v)
			}
		}
		const n = 1000
		for i := 1; i < n; i++ {
			x := float64(i) / n
			rises := w.At(x+1.0/n) > w.At(x)
			if want := x+1.0/n <= w.Epsilon+1e-9; rises != want && (x+1.0/n <= w.Epsilon || x >= w.Epsilon) {
				t.Errorf("ε = %g: window rises at %g: %v, want %v", w.Epsilon, x, rises, want)
			}
		}
	}
}

func TestDuration(t *testing.T) {
	p := example()
	f0 := CornerFrequency(Moment(6), 8e6, 3500)
	near(t, "DurationS", p.DurationS(), 1/f0+1.5, 1e-12) // 0.05 s/km over 30 km
	near(t, "SpanS", p.SpanS(), 12+2*(1/f0+1.5), 1e-12)
}
