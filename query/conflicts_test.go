package query

import (
	"strings"
	"testing"

	"swaybook/db"
)

// Statements within what networks round off agree; the limits are common practice.
func TestAgree(t *testing.T) {
	for _, test := range []struct {
		kind, attribute, a, b string
		want                  bool
	}{
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "6.15 Mw", true},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "6.2 Mw", false},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "6.4 ML", true}, // another quantity
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "5.1 ML", true},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "7.1 ML", true},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "7.2 ML", false},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "3.9 ML", false},
		{db.SubjectEvent, db.AttributeMagnitude, "6.1 Mw", "6.2", false},
		{db.SubjectEvent, db.AttributeOriginTime, "2024-02-03T04:05:06Z", "2024-02-03T04:05:07Z", true},
		{db.SubjectEvent, db.AttributeOriginTime, "2024-02-03T04:05:06Z", "2024-02-03T04:05:07.5Z", false},
		{db.SubjectEvent, db.AttributePosition, "41 14", "41.008 14", true},  // 0.9 km
		{db.SubjectEvent, db.AttributePosition, "41 14", "41.010 14", false}, // 1.1 km
		{db.SubjectStation, db.AttributePosition, "41 14", "41.008 14", false},
		{db.SubjectEvent, db.AttributeDepth, "10", "11", true},
		{db.SubjectEvent, db.AttributeDepth, "10", "12", false},
		{db.SubjectStation, db.AttributeVs30, "300", "303", true},
		{db.SubjectStation, db.AttributeVs30, "300", "310", false},
		{db.SubjectStation, db.AttributeName, "Mill", "The mill", true},
		{db.SubjectStation, db.AttributeSiteClass, "B", "C", false},
		{db.SubjectRecord, db.AttributeEpicentral, "100", "102", true},
		{db.SubjectRecord, db.AttributeEpicentral, "100", "103", false},
		{db.SubjectEvent, db.AttributeIdentifier, "esm:A", "esm:B", false},
		{db.SubjectEvent, db.AttributeIdentifier, "esm:A", "smc:B", true},
	} {
		if got := agree(db.Disputed{Kind: test.kind, Attribute: test.attribute}, test.a, test.b); got != test.want {
			t.Errorf("agree(%s of %s, %q, %q) = %v", test.attribute, test.kind, test.a, test.b, got)
		}
	}
}

func TestConflicts(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	err := change(t.Context(), store, func(tx *db.Tx) error {
		key, err := tx.PutRecord(t.Context(), db.Record{Code: "R1", Siting: "unknown"}, false)
		if err != nil {
			return err
		}
		other, err := tx.PutRecord(t.Context(), db.Record{Code: "R4", Siting: "unknown"}, false)
		if err != nil {
			return err
		}
		event, station := db.Subject{Kind: db.SubjectEvent, ID: key.EventID}, db.Subject{Kind: db.SubjectStation, ID: key.StationID}
		for _, s := range []db.Statement{
			{Subject: event, Attribute: db.AttributeMagnitude, By: db.ByHeader, Value: "6.3 Mw", Source: "b.asc"},
			{Subject: event, Attribute: db.AttributeMagnitude, By: db.ByHeader, Value: "6.31 Mw", Source: "c.asc"},
			{Subject: event, Attribute: db.AttributeMagnitude, By: db.ByCatalogue, Value: "6.5 Mw", Source: "catalogue"},
			{Subject: event, Attribute: db.AttributeDepth, By: db.ByHeader, Value: "9", Source: "b.asc"},
			{Subject: station, Attribute: db.AttributeVs30, By: db.ByHeader, Value: "310", Source: "a.asc"},
			{Subject: station, Attribute: db.AttributeVs30, By: db.ByHeader, Value: "500", Source: "b.asc"},
		} {
			if _, err := tx.State(t.Context(), s); err != nil {
				return err
			}
		}
		_, err = tx.SetEvent(t.Context(), other.EventID, key.EventID, quakeA.Origin, *quakeA)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	answer, err := Conflicts(t.Context(), store, 0)
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	if err := answer.Write(&b, FormatCSV); err != nil {
		t.Fatal(err)
	}
	const want = `subject,code,attribute,taken,taken_from,taken_file,other,other_from,other_file
event,QA,code,QA,association,,QB,association,
event,QA,magnitude,6.5 Mw,catalogue,catalogue,6.3 Mw,header,b.asc
event,QA,magnitude,6.5 Mw,catalogue,catalogue,6.31 Mw,header,c.asc
station,ZX.AAA,vs30_m_s,310,header,a.asc,500,header,b.asc
`
	if got := strings.ReplaceAll(b.String(), "\r", ""); got != want {
		t.Errorf("got\n%swant\n%s", got, want)
	}
}
