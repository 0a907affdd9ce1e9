package invent

import "fmt"

// addConnections puts pairs of single units on one line each. A pair is chosen so that
// together they may be, but need not be, the largest loss.
func (p *plan) addConnections(machines int) {
	want := 1 + min(machines/80, 3)
	taken := map[int]bool{}
	for a := range p.machines {
		for b := a + 1; b < len(p.machines) && want > 0; b++ {
			if taken[a] || taken[b] || !p.onOneLine(a) || !p.onOneLine(b) {
				continue
			}
			share := (p.machines[a].maxMW + p.machines[b].maxMW) / p.peakMW
			if (machines >= 20 && machines <= 60 && share < 0.05) || share > 0.11 {
				continue
			}
			taken[a], taken[b] = true, true
			want--
			p.connections = append(p.connections, group{
				name:    fmt.Sprintf("line_%d", len(p.connections)+1),
				members: []string{p.machines[a].name, p.machines[b].name},
			})
		}
	}
}

// onOneLine tells whether a machine may share its line.
func (p *plan) onOneLine(k int) bool {
	m := p.machines[k]
	return m.count == 1 && (m.tech.label == "hydro" || m.tech.label == "ccgt" || m.tech.label == "gt")
}

// addLosses adds a busbar with small plants behind it, lost together.
func (p *plan) addLosses() {
	r := p.streams.of("embedded")
	mw := embeddedShares(p.streams, p.weather)
	scale(mw, p.peakMW*uniform(r, 0.03, 0.05))
	p.losses = append(p.losses, loss{
		name: "busbar_embedded",
		mw:   p.book.add("losses.csv", "busbar_embedded_mw", 2, mw),
	})
}
