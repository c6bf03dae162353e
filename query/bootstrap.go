package query

import (
	"cmp"
	"math"
	"slices"

	"swaybook/query/stats"
)

// DefaultResamples is the number of resamples of a bootstrap.
const DefaultResamples = 1000

// Bootstrap says how a sample is resampled by whole events. The zero value is none.
type Bootstrap struct {
	Resamples int
	Seed      uint64
}

func (b Bootstrap) isNone() bool { return b.Resamples == 0 }

func (b Bootstrap) validate() error {
	if b.Resamples != 0 && (b.Resamples < 100 || b.Resamples > 1000000) {
		return usage("resamples", "%d is not within 100 to 1000000", b.Resamples)
	}
	return nil
}

// resampled are intervals of a reduction's figures over resamples: of mean and log-mean,
// then of each percentile. They are NaN where the figure is, or the sample is of one event.
type resampled struct {
	mean, logMean interval
	percentiles   []interval
}

// clustersByEvent number motions, by position, by their events; one of no known event
// stands by itself.
func clustersByEvent(motions []motion) []int {
	return numbered(motions, func(m *motion) string {
		if e := m.members[0].Record.Event; e != nil {
			return e.Code
		}
		return "\x00" + m.record()
	})
}

// bootstrap takes values in the order of the sample.
func (r *reducer) bootstrap(out *Reduction, values []float64) *resampled {
	order := slices.DeleteFunc(upTo(len(values)), func(k int) bool { return math.IsNaN(values[k]) })
	slices.SortStableFunc(order, func(i, j int) int {
		return cmp.Or(cmp.Compare(values[i], values[j]), cmp.Compare(r.events[r.at[i]], r.events[r.at[j]]))
	})
	sorted, clusters := make([]float64, len(order)), make([]int, len(order))
	var weights []float64
	if r.clusters != nil {
		all := make([]float64, len(values))
		r.weigh(all, values)
		for _, k := range order {
			weights = append(weights, all[k])
		}
	}
	for i, k := range order {
		sorted[i], clusters[i] = values[k], r.events[r.at[k]]
	}
	return r.resample(out, sorted, weights, clusters)
}

func (r *reducer) resample(out *Reduction, sorted, weights []float64, clusters []int) *resampled {
	nan := interval{math.NaN(), math.NaN()}
	found := &resampled{nan, nan, slices.Repeat([]interval{nan}, len(r.percents))}
	if _, distinct := stats.Number(nil, clusters); distinct < 2 {
		return found
	}
	logs := make([]float64, len(sorted))
	for i, x := range sorted {
		logs[i] = stats.Log(x)
	}
	scratch := make([]float64, len(sorted))
	b := r.extras.Bootstrap
	figures := stats.Bootstrap(clusters, b.Resamples, b.Seed, 2+len(r.percents), func(figures []float64, counts []int) {
		figures[0] = stats.RepeatedMean(sorted, weights, counts)
		logMean, _ := stats.RepeatedMoments(logs, weights, counts)
		figures[1] = stats.Exp(logMean)
		stats.RepeatedPercentiles(figures[2:], scratch, sorted, weights, counts, r.percents)
	})
	between := func(resampled []float64) interval {
		low, high := stats.BootstrapInterval(resampled, r.extras.Level)
		return interval{low, high}
	}
	found.mean, found.logMean = between(figures[0]), between(figures[1])
	for i := range r.percents {
		if !math.IsNaN(out.Percentiles[i]) {
			found.percentiles[i] = between(figures[2+i])
		}
	}
	return found
}

func bootstrapStatistics(percents []float64) []statistic {
	var out []statistic
	add := func(key string, path []string, of func(*resampled) interval) {
		at := func(end string) []string { return append(append([]string{"bootstrap"}, path...), end) }
		part := func(end func(interval) float64) func(*Reduction) float64 {
			return ofExtra(func(e *extraFigures) *resampled { return e.resampled }, func(x *resampled) float64 { return end(of(x)) })
		}
		out = append(out,
			statistic{title: "boot " + key + " low", csv: "bootstrap_" + key + "_low", path: at("low"), hasUnit: true, of: part(func(v interval) float64 { return v.low })},
			statistic{title: "high", csv: "bootstrap_" + key + "_high", path: at("high"), hasUnit: true, of: part(func(v interval) float64 { return v.high })})
	}
	add("mean", []string{"mean"}, func(x *resampled) interval { return x.mean })
	add("log_mean", []string{"log_mean"}, func(x *resampled) interval { return x.logMean })
	for i, percent := range percents {
		key := percentKey(percent)
		add("p"+key, []string{"percentiles", key}, func(x *resampled) interval { return x.percentiles[i] })
	}
	return out
}
