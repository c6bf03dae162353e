package query

import (
	"cmp"
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"swaybook/query/design"
	"swaybook/query/stats"
)

// Extras are figures that stand beside the usual ones where they are asked for.
type Extras struct {
	Design    *design.Spectrum // to compare with, nil for none
	Spread    bool             // between and within events
	Intervals bool             // of confidence, of each percentile
	Lognormal bool             // the fitted distribution beside the percentiles
	Bootstrap Bootstrap        // of a demand, by whole events
	Level     float64          // of confidence; DefaultLevel where 0
}

// DefaultLevel is the level of confidence of intervals.
const DefaultLevel = 0.9

// The words of ParseExtras.
const (
	extraSpread    = "spread"
	extraIntervals = "intervals"
	extraLognormal = "lognormal"
	extraBootstrap = "bootstrap"
)

// ParseExtras reads a list of "spread", "intervals", "lognormal" and "bootstrap". The empty text gives
// none.
func ParseExtras(text string) (Extras, error) {
	var e Extras
	if strings.TrimSpace(text) == "" {
		return e, nil
	}
	for word := range strings.SplitSeq(text, ",") {
		switch strings.TrimSpace(word) {
		case extraSpread:
			e.Spread = true
		case extraIntervals:
			e.Intervals = true
		case extraLognormal:
			e.Lognormal = true
		case extraBootstrap:
			e.Bootstrap = Bootstrap{Resamples: DefaultResamples, Seed: 1}
		default:
			return e, usage("show", "unknown figures %q; accepted: %s", strings.TrimSpace(word),
				joinWords([]string{extraSpread, extraIntervals, extraLognormal, extraBootstrap}))
		}
	}
	return e, nil
}

// ParseLevel reads a level of confidence, "90%" or "0.9". The empty text gives
// DefaultLevel.
func ParseLevel(text string) (float64, error) {
	if strings.TrimSpace(text) == "" {
		return DefaultLevel, nil
	}
	level, err := parseRatio("confidence", text)
	if err != nil {
		return 0, err
	}
	return level, checkLevel(level)
}

func checkLevel(level float64) error {
	if !(level >= 0.5 && level < 1) {
		return usage("confidence", "%v is %v; a level is at least 50%% and less than 100%%", level, percentText(level))
	}
	return nil
}

func (e Extras) withDefaults() (Extras, error) {
	if e.Level == 0 {
		e.Level = DefaultLevel
	}
	return e, cmp.Or(checkLevel(e.Level), e.Bootstrap.validate())
}

// ofOneStructure refuses what only a demand on one structure has.
func (e Extras) ofOneStructure() error {
	if !e.Bootstrap.isNone() {
		return usage("show", "%s is of a demand on one structure", extraBootstrap)
	}
	return nil
}

// extraFigures are those of one reduction; nil where they were not asked for.
type extraFigures struct {
	against   *against
	spread    *spread
	intervals []interval // one a percentile
	lognormal *lognormal
	resampled *resampled
}

// ofExtra is a figure of one of them, NaN where that was not asked for.
func ofExtra[T any](extra func(*extraFigures) *T, part func(*T) float64) func(*Reduction) float64 {
	return func(r *Reduction) float64 {
		if x := extra(&r.extra); x != nil {
			return part(x)
		}
		return math.NaN()
	}
}

// interval holds a percentile of what the sample is drawn from with at least the level of
// confidence. Both are NaN where the sample is too small for that, or weighted.
type interval struct{ low, high float64 }

// intervals are the distribution-free ones of each percentile, by order statistics. They
// take motions as independent.
func (r *reducer) intervals() []interval {
	out := make([]interval, len(r.percents))
	for i, percent := range r.percents {
		out[i] = interval{math.NaN(), math.NaN()}
		if r.clusters != nil {
			continue
		}
		if k := r.ranksOf(len(r.reduced), percent); k.ok {
			out[i] = interval{r.reduced[k.low], r.reduced[k.high]}
		}
	}
	return out
}

// rankKey is a sample's size and a percentile.
type rankKey struct {
	n       int
	percent float64
}

type ranks struct {
	low, high int
	ok        bool
}

// ranksOf keeps what it finds: most periods have samples of one size.
func (r *reducer) ranksOf(n int, percent float64) ranks {
	key := rankKey{n, percent}
	found, ok := r.ranks[key]
	if !ok {
		found.low, found.high, _, found.ok = stats.PercentileInterval(n, percent, r.extras.Level)
		r.ranks[key] = found
	}
	return found
}

// lognormal is the lognormal distribution of the sample's log-mean and deviation, and a
// test whether the sample may come from one.
type lognormal struct {
	percentiles []float64
	// statistic is that of Anderson and Darling, corrected for the size, and p the
	// probability of at least as much; NaN of fewer than eight values, and weighted ones.
	statistic, p float64
}

func (r *reducer) lognormal(out *Reduction) *lognormal {
	l := &lognormal{percentiles: make([]float64, len(r.percents)), statistic: math.NaN(), p: math.NaN()}
	for i, percent := range r.percents {
		l.percentiles[i] = math.NaN()
		if percent > 0 && percent < 100 {
			z := distuv.UnitNormal.Quantile(percent / 100)
			l.percentiles[i] = out.LogMean * stats.Exp(float64(z*out.LogStd))
		}
	}
	if r.clusters == nil {
		l.statistic, l.p = stats.AndersonDarling(r.scratch[:len(r.reduced)], r.reduced)
	}
	return l
}

// statistics are the figures that were asked for.
func (e Extras) statistics(percents []float64) (out []statistic) {
	if e.Intervals {
		for i, percent := range percents {
			out = append(out, intervalStatistics(i, percentKey(percent))...)
		}
	}
	if e.Lognormal {
		out = append(out, lognormalStatistics(percents)...)
	}
	if e.Spread {
		out = append(out, spreadStatistics()...)
	}
	if e.Design != nil {
		out = append(out, designStatistics()...)
	}
	if !e.Bootstrap.isNone() {
		out = append(out, bootstrapStatistics(percents)...)
	}
	return out
}

func intervalStatistics(i int, key string) []statistic {
	of := func(part func(*interval) float64) func(*Reduction) float64 {
		return ofExtra(func(e *extraFigures) *interval {
			if e.intervals == nil {
				return nil
			}
			return &e.intervals[i]
		}, part)
	}
	return []statistic{
		{title: "p" + key + " low", csv: "p" + key + "_low", path: []string{"intervals", key, "low"}, hasUnit: true, of: of(func(v *interval) float64 { return v.low }), isPercentile: true},
		{title: "p" + key + " high", csv: "p" + key + "_high", path: []string{"intervals", key, "high"}, hasUnit: true, of: of(func(v *interval) float64 { return v.high }), isPercentile: true},
	}
}

func lognormalStatistics(percents []float64) []statistic {
	of := func(part func(*lognormal) float64) func(*Reduction) float64 {
		return ofExtra(func(e *extraFigures) *lognormal { return e.lognormal }, part)
	}
	var out []statistic
	for i, percent := range percents {
		key := percentKey(percent)
		out = append(out, statistic{title: "ln p" + key, csv: "lognormal_p" + key, path: []string{"lognormal", "percentiles", key}, hasUnit: true,
			of: of(func(l *lognormal) float64 { return l.percentiles[i] })})
	}
	return append(out,
		statistic{title: "A²*", csv: "anderson_darling", path: []string{"lognormal", "anderson_darling"}, of: of(func(l *lognormal) float64 { return l.statistic })},
		statistic{title: "p-value", csv: "anderson_darling_p", path: []string{"lognormal", "p_value"}, of: of(func(l *lognormal) float64 { return l.p })})
}

// dampingNote says that a design spectrum is for another damping than this.
func (e Extras) dampingNote(damping float64) []string {
	if e.Design == nil {
		return nil
	}
	ratio, fixed := e.Design.Damping()
	if !fixed || ratio == damping {
		return nil
	}
	return []string{"the design spectrum is that of " + percentText(ratio) + " damping, set beside motions at " + percentText(damping)}
}

// isAny reports whether anything is asked for.
func (e Extras) isAny() bool {
	return e.Design != nil || e.Spread || e.Intervals || e.Lognormal || !e.Bootstrap.isNone()
}

// notes are sentences that belong to the figures.
func (e Extras) notes(s *SelectionReport) []string {
	var out []string
	if s.Component == ComponentEach && (e.Intervals || e.Lognormal || e.Spread || !e.Bootstrap.isNone()) {
		out = append(out, "both horizontals of a record count, and are taken as independent, which they are not")
	}
	if e.Intervals {
		if s.Balance.isNone() {
			out = append(out, "intervals hold the percentile of what the motions are drawn from with "+percentText(e.Level)+" confidence, as if motions were independent; those of one event are not")
		} else {
			out = append(out, "intervals by order statistics are of percentiles that are not balanced")
		}
	}
	if b := e.Bootstrap; !b.isNone() {
		out = append(out, fmt.Sprintf("bootstrap: intervals of %s confidence over %d resamples by whole events, seed %d; too short where events are few", percentText(e.Level), b.Resamples, b.Seed))
	}
	if e.Design != nil {
		out = append(out, "design spectrum "+e.Design.Name()+": "+e.Design.Words())
		if e.Design.IsVertical() != (s.Component == ComponentV) && e.Design.HasDirection() {
			out = append(out, "the design spectrum is of the other direction: vertical beside horizontal")
		}
		out = append(out, e.Design.Notes()...)
	}
	return out
}
