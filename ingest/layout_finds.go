package ingest

import (
	"slices"
	"strings"

	"swaybook/ingest/tomlfile"
)

// readFinds reads the patterns on the lines before the numbers.
func (l *Layout) readFinds(t *tomlTable) {
	for _, h := range t.tables("header") {
		f := layoutFind{
			pattern: h.pattern("pattern"), line: h.whole("line", 1, maxLayoutLine), column: h.whole("column", 1, maxLayoutColumns),
			optional: h.flag("optional"), at: t.document.Line(h.path),
		}
		f.inFile = h.word("in", "file", "channel") == "file"
		if f.inFile && l.begin == nil {
			h.fail("in", "there is only one channel's header without [blocks]")
		}
		if f.pattern == nil {
			h.fail("pattern", "missing: a regular expression")
			for _, key := range []string{"gives", "time", "zone"} {
				h.value(key) // known, though there is nothing to hold it against
			}
		} else {
			l.readGives(h, &f)
			l.readTime(h, &f)
		}
		if f.column > 0 && !slices.ContainsFunc(l.numbers.columns, func(c layoutColumn) bool { return c.number == f.column && !c.time }) {
			h.fail("column", "column %d is not described as one of accelerations", f.column)
		}
		h.done()
		l.finds = append(l.finds, f)
	}
}

// readGives settles what each group of a pattern gives: the quantity that it is
// named after, or that gives names for a single group.
func (l *Layout) readGives(h *tomlTable, f *layoutFind) {
	f.gives = f.pattern.SubexpNames()
	gives := h.text("gives")
	named := slices.ContainsFunc(f.gives, func(name string) bool { return name != "" })
	switch {
	case gives != "" && (named || len(f.gives) != 2):
		h.fail("gives", "wants a pattern of one group in parentheses without a name")
	case gives != "":
		f.gives = []string{"", gives}
	case !named:
		h.fail("pattern", "gives nothing: name a group, as in (?P<dt_s>...), or say gives beside one group")
	}
	for i, name := range f.gives {
		if name == "" {
			continue
		}
		if !isQuantity(name) {
			h.fail("pattern", "unknown quantity %s%s; known are %s", name, tomlfile.DidYouMean(tomlfile.NearestKey(name, quantityNames())), strings.Join(quantityNames(), ", "))
		}
		if slices.Contains(f.gives[:i], name) {
			h.fail("pattern", "two groups named %s", name)
		}
		if f.column > 0 && !ofColumns(name) {
			h.fail("column", "%s is the same for all columns", name)
		}
		if name == "channels" && (!f.inFile || l.begin == nil) {
			h.fail("pattern", `channels are announced before the first one: want [blocks] and in = "file"`)
		}
		for _, other := range l.finds {
			if slices.Contains(other.gives, name) && other.column == f.column && other.inFile == f.inFile && !isTimeQuantity(name) {
				h.fail("pattern", "%s is given by the pattern of line %d too", name, other.at)
			}
		}
	}
}

// readTime reads how a time that the pattern gives is written.
func (l *Layout) readTime(h *tomlTable, f *layoutFind) {
	form, zone := h.text("time"), h.text("zone")
	if !slices.ContainsFunc(f.gives, isTimeQuantity) {
		if form != "" || zone != "" {
			h.fail("time", "the pattern gives no start_time and no origin_time")
		}
		return
	}
	if form == "" {
		h.fail("time", `missing: how the time is written, as in "YYYY-MM-DD hh:mm:ss"`)
		return
	}
	var err error
	if f.time, err = parseTimeForm(form); err != nil {
		h.fail("time", "%w", err)
		return
	}
	if zone == "" {
		return
	}
	var ok bool
	if f.time.zone, ok = parseZone(zone); !ok {
		h.fail("zone", `unknown zone %s; want "UTC" or hours from it, as in "+09:00"`, found(zone))
	}
	if f.time.has("zone") {
		h.fail("zone", "the time itself holds a zone")
	}
}

// checkTimes looks whether the patterns of a time together give one.
func (l *Layout) checkTimes(t *tomlTable) {
	for _, name := range []string{"start_time", "origin_time"} {
		var forms []*timeForm
		for _, f := range l.finds {
			if slices.Contains(f.gives, name) && f.time != nil {
				forms = append(forms, f.time)
			}
		}
		if len(forms) == 0 {
			continue
		}
		has := func(words ...string) bool {
			return slices.ContainsFunc(forms, func(f *timeForm) bool { return f.has(words...) })
		}
		zoned := has("zone") || slices.ContainsFunc(forms, func(f *timeForm) bool { return f.zone != nil })
		switch {
		case !has("YYYY", "YY"):
			t.fail("header", "%s: no pattern gives the year", name)
		case !has("DOY") && !(has("MM", "MON") && has("DD")):
			t.fail("header", "%s: no pattern gives month and day", name)
		case has("hh") != has("mm") || has("ss") && !has("mm"):
			t.fail("header", "%s: hours, minutes and seconds do not fit together", name)
		case name == "start_time" && !has("hh"):
			t.fail("header", "start_time: no pattern gives the hour")
		case has("hh") && !zoned:
			t.fail("header", `%s: zone is missing, as in zone = "UTC" or zone = "+09:00"`, name)
		}
	}
}
