package fleet

import "math"

var relayKeys = []string{"name", "level_hz", "over", "rocof_hz_per_s", "window_s", "delay_s", "shed_share", "lost_mw", "lost_mws"}

// relays reads what acts on frequency besides response: load shedding in stages, embedded
// generation that trips.
func (r *reader) relays(s *section) {
	for i, n := range s.items("relays", "a list of relays") {
		g := r.section(n, entryPath(n, "relays", i), n.Line, relayKeys)
		if g == nil {
			continue
		}
		q := Relay{
			Name: r.claim(g, r.names, "resource, connection, loss and relay"),
			Over: g.flag("over", false), LevelHz: g.numberOr("level_hz", positive, 0), HzPerS: g.numberOr("rocof_hz_per_s", positive, 0),
			WindowS: g.numberOr("window_s", rule{lo: 0, hi: 10}, 0), DelayS: g.numberOr("delay_s", rule{lo: 0, hi: maxSeconds}, 0),
			ShedShare: g.numberOr("shed_share", share, 0),
			LostMW:    g.valueOr("lost_mw", notBelow0, 0).Value, LostMWs: g.valueOr("lost_mws", notBelow0, 0).Value,
		}
		switch {
		case !g.has("level_hz") && !g.has("rocof_hz_per_s"):
			g.missing("level_hz", "a level (Hz from nominal) or rocof_hz_per_s that sets it off")
		case g.has("level_hz") && g.has("rocof_hz_per_s"):
			g.fault("rocof_hz_per_s", "a rate beside a level", "either of the two; two relays for both")
		}
		if !g.has("shed_share") && !g.has("lost_mw") {
			g.missing("shed_share", "what it switches off: shed_share of the load, or lost_mw of generation")
		}
		if l := r.c.Limits; q.ShedShare > 0 && !q.Over && q.LevelHz > 0 && q.LevelHz < l.NadirHz && !math.IsNaN(l.NadirHz) {
			g.warn("level_hz", num(q.LevelHz), "at least nadir.max_deviation_hz ("+num(l.NadirHz)+"): else load is shed within the corridor")
		}
		r.c.Relays = append(r.c.Relays, q)
	}
}
