package main

import (
	"io"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/common/expfmt"
)

// writeMetrics writes the state in the text format of Prometheus, for a collector of text
// files. Source: "Exposition formats", text-based format 0.0.4, prometheus.io.
func (s *studyState) writeMetrics(w io.Writer) error {
	m := &metrics{registry: prometheus.NewRegistry(), study: s.Study}
	m.gauge("run_end_timestamp_seconds", "When the last run ended, in seconds since 1970.", secondsOf(&s.Ended))
	m.gauge("run_duration_seconds", "How long the last run took.", s.Seconds)
	m.gauge("run_exit_code", "The exit code of the last run: 0 and 3 are right, 4 holds results back.", float64(s.ExitCode))
	if s.LastSuccess != nil {
		m.gauge("last_success_timestamp_seconds", "When the last run ended that left what is published current, in seconds since 1970.", secondsOf(s.LastSuccess))
	}
	if s.Published != nil {
		m.gauge("published_edition", "The number of the edition that questions read.", float64(*s.Published))
	}
	m.gauge("is_held_back", "1 where an edition is held back, else 0.", oneIf(s.Outcome == outcomeHeld))
	if s.Rejected != nil {
		m.gauge("rejected_files", "Files that are rejected.", float64(*s.Rejected))
	}
	if s.Drift != nil {
		m.gauge("drifting_figures", "Figures beyond the bound of the study.", float64(s.Drift.Beyond))
	}
	families, err := m.registry.Gather()
	for _, family := range families {
		if err == nil {
			_, err = expfmt.MetricFamilyToText(w, family)
		}
	}
	return err
}

// metrics are those of one study.
type metrics struct {
	registry *prometheus.Registry
	study    string
}

func (m *metrics) gauge(name, help string, value float64) {
	g := prometheus.NewGauge(prometheus.GaugeOpts{Namespace: "swaybook", Name: name, Help: help, ConstLabels: prometheus.Labels{"study": m.study}})
	g.Set(value)
	m.registry.MustRegister(g)
}

func oneIf(is bool) float64 {
	if is {
		return 1
	}
	return 0
}

// secondsOf is a time of the state in seconds since 1970.
func secondsOf(text *string) float64 {
	t, _ := time.Parse(time.RFC3339Nano, *text) // the program wrote it
	return float64(t.UnixNano()) / 1e9
}
