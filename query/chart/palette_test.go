package chart

import (
	"image/color"
	"math"
	"slices"
	"testing"
)

// linear are the components of a colour of sRGB in linear light (IEC 61966-2-1).
func linear(c color.NRGBA) [3]float64 {
	var out [3]float64
	for i, b := range []uint8{c.R, c.G, c.B} {
		x := float64(b) / 255
		if out[i] = x / 12.92; x > 0.04045 {
			out[i] = math.Pow((x+0.055)/1.055, 2.4)
		}
	}
	return out
}

// blindness are matrices in linear light of eyes that lack a kind of cone.
//
// Source: G. M. Machado, M. M. Oliveira and L. A. F. Fernandes, "A physiologically-based
// model for simulation of color vision deficiency", IEEE Trans. Visualization and Computer
// Graphics 15, 2009, 1291–1298; their values for severity 1, from memory.
var blindness = map[string][3][3]float64{
	"none":         {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}},
	"protanopia":   {{0.152286, 1.052583, -0.204868}, {0.114503, 0.786281, 0.099216}, {-0.003882, -0.048116, 1.051998}},
	"deuteranopia": {{0.367322, 0.860646, -0.227968}, {0.280085, 0.672501, 0.047413}, {-0.011820, 0.042940, 0.968881}},
	"tritanopia":   {{1.255528, -0.076749, -0.178779}, {-0.078411, 0.930809, 0.147602}, {0.004733, 0.691367, 0.303900}},
}

// lab are CIELAB coordinates of linear sRGB under D65 (CIE 15:2004).
func lab(rgb [3]float64) [3]float64 {
	m := [3][3]float64{{0.4124, 0.3576, 0.1805}, {0.2126, 0.7152, 0.0722}, {0.0193, 0.1192, 0.9505}}
	white := [3]float64{0.9505, 1, 1.089}
	var f [3]float64
	for i := range 3 {
		x := max(0, m[i][0]*rgb[0]+m[i][1]*rgb[1]+m[i][2]*rgb[2]) / white[i]
		if f[i] = math.Cbrt(x); x <= 216./24389 {
			f[i] = (24389./27*x + 16) / 116
		}
	}
	return [3]float64{116*f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])}
}

func seenBy(m [3][3]float64, c color.NRGBA) [3]float64 {
	rgb := linear(c)
	var out [3]float64
	for i := range 3 {
		out[i] = min(1, max(0, m[i][0]*rgb[0]+m[i][1]*rgb[1]+m[i][2]*rgb[2]))
	}
	return lab(out)
}

// Curves of other meanings are apart for every eye: by 12 units of CIELAB at least, several
// times what is just noticed side by side; and each differs from the single spectra by its
// lightness, for print in grey.
func TestColoursAreApart(t *testing.T) {
	curves := map[string]color.NRGBA{"percentiles": deep, "mean": warm, "envelope": plum, "structure": mark, "design": designs, "record": tone}
	for eye, m := range blindness {
		for a, ca := range curves {
			for b, cb := range curves {
				if a >= b {
					continue
				}
				x, y := seenBy(m, ca), seenBy(m, cb)
				if d := math.Sqrt((x[0]-y[0])*(x[0]-y[0]) + (x[1]-y[1])*(x[1]-y[1]) + (x[2]-y[2])*(x[2]-y[2])); d < 12 {
					t.Errorf("%s: %s and %s are %.1f apart", eye, a, b, d)
				}
			}
		}
	}
	for name, c := range curves {
		if lab(linear(faint))[0]-lab(linear(c))[0] < 25 {
			t.Errorf("in grey %s is hardly darker than single spectra", name)
		}
	}
}

// contrast is that of a colour to another one that lies under it, on white (WCAG 2.1, "contrast
// ratio").
func contrast(c, under color.NRGBA) float64 {
	luminance := func(c color.NRGBA) float64 {
		rgb := linear(c)
		return 0.2126*rgb[0] + 0.7152*rgb[1] + 0.0722*rgb[2]
	}
	return (luminance(under) + 0.05) / (luminance(c) + 0.05)
}

// Words have a contrast of 4.5 to the paper at least (WCAG 2.1, success criterion 1.4.3), curves
// of statistics too, with a margin, and of 3 to the band, as few single spectra have to the paper
// (criterion 1.4.11).
func TestContrast(t *testing.T) {
	white := color.NRGBA{0xff, 0xff, 0xff, 0xff}
	over := func(x uint8) uint8 { return uint8((int(x)*int(veil.A) + 0xff*(0xff-int(veil.A))) / 0xff) }
	band := color.NRGBA{over(veil.R), over(veil.G), over(veil.B), 0xff}
	for name, c := range map[string]color.NRGBA{"ink": ink, "quiet": quiet, "mark": mark, "tone": tone} {
		if x := contrast(c, white); x < 4.5 {
			t.Errorf("%s has a contrast of %.2f", name, x)
		}
	}
	for _, kind := range []Kind{Median, Percentile, Mean, Envelope, Design} {
		c := color.NRGBAModel.Convert(styles[kind].Color).(color.NRGBA)
		if x, y := contrast(c, white), contrast(c, band); x < 5 || y < 3 {
			t.Errorf("%v has a contrast of %.2f, of %.2f over the band", c, x, y)
		}
	}
	if x := contrast(single(few), white); x < 3.2 {
		t.Errorf("few single spectra have a contrast of %.2f", x)
	}
	for n, want := range map[int]color.NRGBA{few: dim, few + 1: faint} {
		svg := string(written(t, SVG, invented(n)))
		if longest := drawnIn(t, svg, hex(want)); len(longest) < n {
			t.Errorf("%d single spectra: %d lines are drawn in %v", n, len(longest), want)
		}
	}
	if len(drawnIn(t, string(written(t, SVG, invented(few))), hex(faint))) > 0 {
		t.Error("few single spectra are faint")
	}
}

// Lines of dampings, all of one colour, differ in their dashes, or in their widths by twice.
func TestDampingsDiffer(t *testing.T) {
	kinds := []Kind{UsuallyDamped}
	for nth := range otherDampings {
		kinds = append(kinds, OtherDamping(nth))
	}
	for i, a := range kinds {
		for _, b := range kinds[:i] {
			x, y := styles[a], styles[b]
			if slices.Equal(x.Dashes, y.Dashes) && max(x.Width, y.Width) < 2*min(x.Width, y.Width) {
				t.Errorf("kinds %d and %d are %v wide with dashes %v and %v wide with %v", a, b, x.Width, x.Dashes, y.Width, y.Dashes)
			}
		}
		if styles[a].Width == 0 {
			t.Errorf("kind %d has no line", a)
		}
	}
}
