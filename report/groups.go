package report

import (
	"image/color"

	"evenkeel/fleet"
)

// groups says how resources are shown together: each by itself where there are few,
// else by kind.
type groups struct {
	c      *fleet.Case
	of     []int // group of each resource
	names  []string
	colors []color.Color
}

// shownAlone is how many resources still can be told apart by colour.
const shownAlone = 9

func newGroups(c *fleet.Case) groups {
	g := groups{c: c, of: make([]int, len(c.Resources))}
	if len(c.Resources) <= shownAlone {
		for r := range c.Resources {
			g.of[r] = r
			g.names = append(g.names, c.Resources[r].Name)
			g.colors = append(g.colors, resourceColors[r])
		}
		return g
	}
	index := map[fleet.Kind]int{}
	for k := fleet.Thermal; k <= fleet.Link; k++ {
		for r := range c.Resources {
			if c.Resources[r].Kind != k {
				continue
			}
			if _, ok := index[k]; !ok {
				index[k] = len(g.names)
				g.names = append(g.names, k.String())
				g.colors = append(g.colors, kindColors[k])
			}
			g.of[r] = index[k]
		}
	}
	return g
}

// Colours that stay apart with any common colour blindness.
var (
	kindColors = [...]color.Color{
		fleet.Thermal: rgb(0xCC6677), fleet.Hydro: rgb(0x332288), fleet.Condenser: rgb(0xAA4499), fleet.Battery: rgb(0x44AA99),
		fleet.Wind: rgb(0x88CCEE), fleet.Solar: rgb(0xDDCC77), fleet.Demand: rgb(0x117733), fleet.Link: rgb(0x882255),
	}
	resourceColors = [shownAlone]color.Color{
		rgb(0xCC6677), rgb(0x332288), rgb(0xDDCC77), rgb(0x117733), rgb(0x88CCEE),
		rgb(0x882255), rgb(0x44AA99), rgb(0x999933), rgb(0xAA4499),
	}
	shapeColors = []color.Color{
		rgb(0x0072B2), rgb(0xE69F00), rgb(0x009E73), rgb(0xCC79A7), rgb(0x56B4E9), rgb(0xD55E00), rgb(0xF0E442), rgb(0x999999),
	}
)
