package db

import (
	"context"
	"fmt"
	"time"
)

// Quake is an event of a QuakeML document that may be an event of the store.
type Quake struct {
	PublicID string
	Came     bool      // its waves reached a station while a record of the event ran
	Created  time.Time // when this version of it came about, zero where nobody says
	Event              // Code is that which it gives
}

// PutQuake stores that q may be the event, in place of another version of it. The code
// stays that of the first: the event may be named after it, which is how it is known as
// the one that gave the code.
func (t *Tx) PutQuake(ctx context.Context, eventID int64, q Quake) error {
	err := t.exec(ctx, `INSERT INTO quake
			(event_id, public_id, code, came, name, origin_time, latitude_deg, longitude_deg, depth_km, magnitude, magnitude_type, created_at)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT DO UPDATE SET came = excluded.came, name = excluded.name,
			origin_time = excluded.origin_time, latitude_deg = excluded.latitude_deg, longitude_deg = excluded.longitude_deg,
			depth_km = excluded.depth_km, magnitude = excluded.magnitude, magnitude_type = excluded.magnitude_type, created_at = excluded.created_at`,
		eventID, q.PublicID, q.Code, q.Came, textOrNull(q.Name), timeText(q.Origin), q.LatitudeDeg, q.LongitudeDeg, q.DepthKM, q.Magnitude,
		textOrNull(q.MagnitudeType), timeText(q.Created))
	if err != nil {
		return fmt.Errorf("store QuakeML event %s: %w", q.PublicID, err)
	}
	return nil
}

// Quakes returns the QuakeML events that may be the event, by public identifier.
func (t *Tx) Quakes(ctx context.Context, eventID int64) ([]Quake, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT public_id, code, came, coalesce(name, ''), origin_time, latitude_deg, longitude_deg, depth_km,
		magnitude, coalesce(magnitude_type, ''), coalesce(created_at, '') FROM quake WHERE event_id = ? ORDER BY public_id`, eventID)
	if err != nil {
		return nil, fmt.Errorf("read QuakeML events: %w", err)
	}
	type row struct {
		Quake
		origin, created string
	}
	found, err := collect(rows, func(q *row) []any {
		return []any{&q.PublicID, &q.Code, &q.Came, &q.Name, &q.origin, &q.LatitudeDeg, &q.LongitudeDeg, &q.DepthKM, &q.Magnitude, &q.MagnitudeType, &q.created}
	})
	if err != nil {
		return nil, fmt.Errorf("read QuakeML events: %w", err)
	}
	out := make([]Quake, len(found))
	for i, q := range found {
		if q.Origin, err = parseTime(q.origin); err != nil {
			return nil, err
		}
		if q.Created, err = parseTime(q.created); err != nil {
			return nil, err
		}
		out[i] = q.Quake
	}
	return out, nil
}

// ForgetQuake removes a QuakeML event from those that may be the event.
func (t *Tx) ForgetQuake(ctx context.Context, eventID int64, publicID string) error {
	if err := t.exec(ctx, `DELETE FROM quake WHERE event_id = ? AND public_id = ?`, eventID, publicID); err != nil {
		return fmt.Errorf("forget QuakeML event %s: %w", publicID, err)
	}
	return nil
}

// PutWithdrawn stores that a QuakeML event was withdrawn, and when it was said, in place
// of what was known of that; zero is unknown.
func (t *Tx) PutWithdrawn(ctx context.Context, publicID string, at time.Time) error {
	err := t.exec(ctx, `INSERT INTO withdrawn_quake (public_id, created_at) VALUES (?, ?)
		ON CONFLICT DO UPDATE SET created_at = excluded.created_at`, publicID, timeText(at))
	if err != nil {
		return fmt.Errorf("withdraw QuakeML event %s: %w", publicID, err)
	}
	return nil
}

// Withdrawn returns the public identifiers of the QuakeML events that were withdrawn, and
// when.
func (t *Tx) Withdrawn(ctx context.Context) (map[string]time.Time, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT public_id, coalesce(created_at, '') FROM withdrawn_quake`)
	if err != nil {
		return nil, fmt.Errorf("read withdrawn events: %w", err)
	}
	found, err := collect(rows, func(v *[2]string) []any { return []any{&v[0], &v[1]} })
	if err != nil {
		return nil, fmt.Errorf("read withdrawn events: %w", err)
	}
	out := make(map[string]time.Time, len(found))
	for _, v := range found {
		if out[v[0]], err = parseTime(v[1]); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// IsTimed reports whether anybody says when the record's earthquake was.
func (t *Tx) IsTimed(ctx context.Context, recordID int64) (timed bool, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT count(*) > 0 FROM record r JOIN event e ON e.id = r.event_id
		WHERE r.id = ? AND e.origin_time IS NOT NULL`, recordID).Scan(&timed)
	if err != nil {
		return false, fmt.Errorf("read the event of a record: %w", err)
	}
	return timed, nil
}

// CopyQuakes gives an event the QuakeML events that may be another one.
func (t *Tx) CopyQuakes(ctx context.Context, from, to int64) error {
	err := t.exec(ctx, `INSERT INTO quake SELECT ?, public_id, code, came, name, origin_time, latitude_deg, longitude_deg, depth_km, magnitude,
		magnitude_type, created_at FROM quake WHERE event_id = ? ON CONFLICT DO NOTHING`, to, from)
	if err != nil {
		return fmt.Errorf("copy QuakeML events: %w", err)
	}
	return nil
}
