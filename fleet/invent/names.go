package invent

import (
	"fmt"
	"math/rand/v2"
)

var (
	nameStarts = []string{"Tor", "Bryn", "Kel", "Aska", "Mor", "Hesk", "Fen", "Gril", "Var", "Ond", "Sul", "Thra",
		"Pell", "Dun", "Ister", "Wrey", "Lor", "Cald", "Ebb", "Nor", "Ruk", "Skar", "Yth", "Quen", "Ald", "Marr",
		"Hol", "Tarn", "Vesk", "Jor", "Oth", "Bel"}
	nameEnds = []string{"vane", "mere", "holt", "wick", "isk", "garth", "fell", "ness", "dale", "ow", "rith", "combe",
		"ayre", "und", "stad", "quay", "leigh", "moor", "by", "enna", "os", "ford", "ira", "eck"}
)

// namer makes up place names and gives none out twice.
type namer struct {
	r    *rand.Rand
	used map[string]bool
}

func newNamer(r *rand.Rand) *namer { return &namer{r: r, used: map[string]bool{}} }

// place is a new place name; once the plain ones run short, it carries a number.
func (n *namer) place() string {
	for try := 0; ; try++ {
		name := among(n.r, nameStarts...) + among(n.r, nameEnds...)
		if try >= 20 {
			name = fmt.Sprintf("%s%d", name, 2+try/20)
		}
		if !n.used[name] {
			n.used[name] = true
			return name
		}
	}
}
