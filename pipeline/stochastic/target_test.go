package stochastic

import (
	"math"
	"testing"
)

// example returns parameters of an invented crust.
func example() Params {
	return Params{
		Source:   Source{Magnitude: 6, StressDropPa: 8e6, ShearVelocityMPS: 3500, DensityKGM3: 2800, Partition: HorizontalPartition},
		Path:     Path{DistanceM: 30e3, BreakM: 50e3, FarExponent: 0.5, Q0: 150, QExponent: 0.5, VelocityMPS: 3500, DurationSPerM: 5e-5},
		Site:     Site{Vs30MPS: 760, KappaS: 0.035},
		Window:   StandardWindow(),
		LowCutHz: 0.15,
		OnsetS:   12,
	}
}

// bare returns the example without path attenuation, site and filters.
func bare() Params {
	p := example()
	p.Path.Q0 = 1e12
	p.Site = Site{}
	p.LowCutHz = 0
	return p
}

// The same target in the units of the source paper: km, km/s, g/cm³, dyn·cm and
// bar give cm/s with the factor 1e-20.
func TestTargetInPublishedUnits(t *testing.T) {
	p := example()
	for _, f := range []float64{0.05, 0.3, 1, 4, 20} {
		m0 := math.Pow(10, 1.5*6+16.05)
		f0 := 4.9e6 * 3.5 * math.Cbrt(80/m0)
		c := 0.55 / math.Sqrt2 * 2 / (4 * math.Pi * 2.8 * math.Pow(3.5, 3)) * 1e-20
		source := c * m0 * math.Pow(2*math.Pi*f, 2) / (1 + math.Pow(f/f0, 2))
		path := 1.0 / 30 * math.Exp(-math.Pi*f*30/(150*math.Sqrt(f)*3.5))
		site := Amplification(f, 760, 3500) * math.Exp(-math.Pi*0.035*f)
		cut := 1 / math.Sqrt(1+math.Pow(0.15/f, 4))
		near(t, "FourierTarget in cm/s", 100*FourierTarget(f, p), source*path*site*cut, 1e-11)
	}
}

// Displacement is flat far below the corner and acceleration far above it; the
// two plateaus meet at the corner.
func TestTargetPlateaus(t *testing.T) {
	p := bare()
	f0 := CornerFrequency(Moment(6), 8e6, 3500)
	low, high := f0*1e-4, f0*1e4
	displacement := FourierTarget(low, p) / math.Pow(2*math.Pi*low, 2)
	want := 0.55 / math.Sqrt2 * 2 * Moment(6) / (4 * math.Pi * 2800 * math.Pow(3500, 3) * 30e3)
	near(t, "displacement plateau in m·s", displacement, want, 1e-7)
	near(t, "acceleration plateau in m/s", FourierTarget(high, p), want*math.Pow(2*math.Pi*f0, 2), 1e-7)
	near(t, "value at the corner", FourierTarget(f0, p), want*math.Pow(2*math.Pi*f0, 2)/2, 1e-9)
	if y := FourierTarget(0, p); y != 0 {
		t.Errorf("FourierTarget(0) = %g, want 0", y)
	}
}

func TestTargetFactors(t *testing.T) {
	reference := FourierTarget(2, bare())
	for _, c := range []struct {
		name   string
		change func(*Params)
		want   float64
	}{
		{"kappa", func(p *Params) { p.Site.KappaS = 0.05 }, math.Exp(-math.Pi * 0.05 * 2)},
		{"Q without frequency", func(p *Params) { p.Path.Q0, p.Path.QExponent = 200, 0 }, math.Exp(-math.Pi * 2 * 30e3 / (200 * 3500))},
		{"low cut at its corner", func(p *Params) { p.LowCutHz = 2 }, 1 / math.Sqrt2},
		{"high cut at its corner", func(p *Params) { p.HighCutHz = 2 }, 1 / math.Sqrt2},
		{"low cut an octave above", func(p *Params) { p.LowCutHz = 4 }, 1 / math.Sqrt(17)},
		{"response", func(p *Params) { p.Response = func(f float64) float64 { return f } }, 2},
		{"partition", func(p *Params) { p.Source.Partition /= 2 }, 0.5},
	} {
		p := bare()
		c.change(&p)
		near(t, c.name, FourierTarget(2, p)/reference, c.want, 1e-9)
	}
}

func TestSpreading(t *testing.T) {
	p := Path{BreakM: 50e3, FarExponent: 0.5}
	for _, c := range []struct{ r, want float64 }{
		{10e3, 1e-4},
		{50e3, 2e-5},
		{50e3 * (1 + 1e-12), 2e-5}, // continuous at the break
		{200e3, 1e-5},              // four times as far, half the amplitude
	} {
		p.DistanceM = c.r
		near(t, "Spreading", Spreading(p), c.want, 1e-11)
	}
}

// The generic rock site of Boore & Joyner (1997), Vs30 = 620 m/s, is quoted from
// memory, with three digits. One power law cannot follow it exactly: 5 % is all that a
// made-up motion needs.
func TestAmplificationOfGenericRock(t *testing.T) {
	for _, c := range []struct{ f, want float64 }{
		{0.09, 1.10}, {0.16, 1.18}, {0.51, 1.42}, {0.84, 1.58}, {1.25, 1.74},
		{2.26, 2.06}, {3.17, 2.25}, {6.05, 2.58}, {16.6, 3.13}, {61.2, 4.00},
	} {
		near(t, "Amplification", Amplification(c.f, 620, 3500), c.want, 0.05)
	}
}

func TestAmplificationLimits(t *testing.T) {
	// A quarter wavelength of 30 m: the averaged velocity is Vs30 itself.
	near(t, "Amplification at Vs30/120 Hz", Amplification(760.0/120, 760, 3500), math.Sqrt(3500.0/760), 1e-3)
	near(t, "Amplification far below", Amplification(1e-4, 760, 3500), 1, 1e-4)
	if a := Amplification(1, 0, 3500); a != 1 {
		t.Errorf("Amplification without Vs30 = %g, want 1", a)
	}
	if soft, hard := Amplification(1, 250, 3500), Amplification(1, 900, 3500); soft <= hard {
		t.Errorf("amplification %g on soft, %g on hard ground: want more on soft", soft, hard)
	}
}

func TestValidate(t *testing.T) {
	if err := example().Validate(); err != nil {
		t.Fatalf("valid parameters: %v", err)
	}
	for _, c := range []struct {
		name   string
		change func(*Params)
		want   string
	}{
		{"no stress", func(p *Params) { p.Source.StressDropPa = 0 }, "stochastic: stress drop in Pa is 0"},
		{"NaN", func(p *Params) { p.Path.DistanceM = math.NaN() }, "stochastic: distance in m is NaN"},
		{"infinite", func(p *Params) { p.Path.Q0 = math.Inf(1) }, "stochastic: Q0 is +Inf"},
		{"negative kappa", func(p *Params) { p.Site.KappaS = -0.01 }, "stochastic: kappa in s is -0.01"},
		{"magnitude", func(p *Params) { p.Source.Magnitude = 11 }, "stochastic: magnitude is 11; it must lie in 0 to 10"},
		{"filters", func(p *Params) { p.HighCutHz = 0.1 }, "stochastic: high cut 0.1 Hz is not above low cut 0.15 Hz"},
		{"window", func(p *Params) { p.Window.Eta = 1 }, "stochastic: window ε 0.2 and η 1 must lie between 0 and 1"},
		{"stretch", func(p *Params) { p.Window.Stretch = 0 }, "stochastic: window stretch is 0"},
	} {
		p := example()
		c.change(&p)
		if err := p.Validate(); err == nil || err.Error() != c.want {
			t.Errorf("%s: Validate() = %v, want %q", c.name, err, c.want)
		}
	}
}
