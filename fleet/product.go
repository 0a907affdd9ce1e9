package fleet

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"

	"evenkeel/limits"
	"evenkeel/limits/dynamic"
)

// Product is a response that nobody holds yet: how fast it comes, how long it lasts, how much
// of it there could be and what it asks for.
type Product struct {
	Path  string // of the YAML file, as given
	Hash  string // sha256 over the YAML file and its series files, hex
	Files []string

	Name string
	// ActivationS is when all of it is out, DelayS of it without any: counted from the loss, or
	// with LevelHz from the instant at which frequency passes that level.
	ActivationS, DelayS float64
	HoldS, WithdrawS    float64 // as in limits.Timing
	LevelHz             float64 // below nominal, that sets it off; 0: it comes in after any loss
	CapMW               Value
	Steps               []ProductStep // rising in price, counted from 0 MW
}

// ProductStep is one step of what a product asks for.
type ProductStep struct {
	ToMW, PricePerMW float64 // for holding 1 MW for an hour
}

var (
	productKeys     = []string{"product", "activation_s", "delay_s", "hold_s", "withdraw_s", "cap_mw", "price_steps", "level_hz"}
	productStepKeys = []string{"to_mw", "per_mw"}
)

// ReadProduct reads and vets a product for a case: the YAML file at path and the CSV files it
// names. As Read it reports every fault; the product is nil if there is any error. FORMAT.md lists
// the keys.
func ReadProduct(path string, c *Case) (*Product, Findings) {
	return readProduct(path, c, openFile)
}

func readProduct(path string, c *Case, open opener) (*Product, Findings) {
	r := &reader{
		path: path, dir: filepath.Dir(path), open: open, what: "product",
		tables: map[string]*table{}, bounded: map[string]bool{}, names: map[string]int{},
		times: c.Times, clock: c.Path, c: &Case{Path: path, Limits: c.Limits},
	}
	raw, err := open(path, maxCaseBytes)
	if err != nil {
		r.fault(0, "", err.Error(), "a product file that can be read")
		return nil, r.found
	}
	p := &Product{Path: path}
	if root := r.parse(raw); root != nil {
		if s := r.section(root, "", root.Line, productKeys); s != nil {
			r.product(s, p, c)
		}
	}
	r.found = r.found.sorted(path)
	if len(r.found.Errors()) > 0 {
		return nil, r.found
	}
	p.Hash, p.Files = r.hash(raw)
	return p, r.found
}

func (r *reader) product(s *section, p *Product, c *Case) {
	name, ok := s.text("product")
	p.Name = name
	if ok && c.taken(name) {
		s.fault("product", quoted(name)+", a name that the case has", "a name of its own, no resource's, connection's, loss's, shape's or model's")
	}
	span := rule{lo: 0, hi: maxSeconds}
	p.ActivationS = s.number("activation_s", rule{lo: 0, hi: maxSeconds, above: true})
	p.DelayS = s.numberOr("delay_s", span, 0)
	p.HoldS = s.numberOr("hold_s", span, 0)
	p.WithdrawS = s.numberOr("withdraw_s", span, 0)
	s.usualActivation(p.ActivationS)
	p.LevelHz = s.levelHz(c.Limits)
	if p.DelayS > p.ActivationS {
		s.fault("delay_s", num(p.DelayS), "at most activation_s ("+num(p.ActivationS)+"), of which it is a part")
	}
	p.CapMW = s.value("cap_mw", notBelow0).Value
	if p.CapMW.most() == 0 {
		s.fault("cap_mw", "0 in every hour", "more than 0 in some hour")
	}
	if peak := c.Load.DemandMW.most(); p.CapMW.most() > peak {
		s.warn("cap_mw", num(p.CapMW.most()), "at most the highest demand of the case ("+num(peak)+" MW): no loss is larger (common practice)")
	}
	r.productSteps(s, p)
	if len(r.found.Errors()) > 0 {
		return
	}
	sh, err := p.shape(c, p.ActivationS)
	switch {
	case err != nil:
		r.fault(s.line, "", "times that make no response", err.Error())
	case !delivers(sh, c.Limits.SteadyUntilS):
		r.fault(s.line, "", fmt.Sprintf("a response that delivers nothing in the first %s s", num(c.Limits.SteadyUntilS)), "some response before frequency.steady.until_s of the case")
	}
}

func (r *reader) productSteps(s *section, p *Product) {
	nodes := s.items("price_steps", "a list of steps such as {to_mw: 20, per_mw: 1.5}")
	if len(nodes) == 0 {
		s.missing("price_steps", "at least one step such as {to_mw: 20, per_mw: 1.5}")
		return
	}
	for i, n := range nodes {
		g := r.section(n, fmt.Sprintf("%s[%d]", s.key("price_steps"), i+1), n.Line, productStepKeys)
		if g == nil {
			continue
		}
		st := ProductStep{ToMW: g.number("to_mw", positive), PricePerMW: g.number("per_mw", notBelow0)}
		if len(p.Steps) > 0 {
			last := p.Steps[len(p.Steps)-1]
			g.follows("per_mw", st.ToMW, last.ToMW, st.PricePerMW, last.PricePerMW, "the cheapest comes first")
		}
		p.Steps = append(p.Steps, st)
	}
	if most := p.CapMW.most(); len(p.Steps) > 0 && p.Steps[len(p.Steps)-1].ToMW < most {
		s.fault("price_steps", "steps that end at "+num(p.Steps[len(p.Steps)-1].ToMW)+" MW", "steps up to cap_mw ("+num(most)+")")
	}
}

// taken tells whether something in the case has a name.
func (c *Case) taken(name string) bool {
	return slices.ContainsFunc(c.Resources, func(r Resource) bool { return r.Name == name }) ||
		slices.ContainsFunc(c.Connections, func(g Connection) bool { return g.Name == name }) ||
		slices.ContainsFunc(c.Losses, func(l Loss) bool { return l.Name == name }) ||
		slices.ContainsFunc(c.Relays, func(q Relay) bool { return q.Name == name }) ||
		slices.ContainsFunc(c.Shapes, func(sh NamedShape) bool { return sh.Name == name })
}

// timing is the product's course with another activation time. Its delay keeps its share of it.
func (p *Product) timing(activationS float64) limits.Timing {
	delay := p.DelayS / p.ActivationS * activationS
	return limits.Timing{DelayS: delay, RampS: activationS - delay, HoldS: p.HoldS, WithdrawS: p.WithdrawS}
}

// model is what sets a product off at a level; nil where it comes in after any loss.
func (p *Product) model(c *Case, activationS float64) *NamedModel {
	if p.LevelHz == 0 {
		return nil
	}
	m := dynamic.Defaults(dynamic.Step)
	m.Name, m.LevelHz, m.Course = p.Name, p.LevelHz, p.timing(activationS)
	return &NamedModel{Name: p.Name, Model: &m, Test: usualTest(c.Limits), Shape: len(c.Shapes)}
}

func (p *Product) shape(c *Case, activationS float64) (limits.Shape, error) {
	if m := p.model(c, activationS); m != nil {
		if err := m.Model.Check(); err != nil {
			return limits.Shape{}, err
		}
		return m.course()
	}
	return p.timing(activationS).Shape()
}

// Shape is the product's response in a case, with another activation time than its own if
// activationS is not 0. A product that a level sets off responds as in the qualification that
// a model without one of its own has.
func (p *Product) Shape(c *Case, activationS float64) (NamedShape, error) {
	if activationS == 0 {
		activationS = p.ActivationS
	}
	sh, err := p.shape(c, activationS)
	return NamedShape{Name: p.Name, Shape: sh, Model: p.LevelHz > 0}, err
}

// Holders are the resources of the case that In gives which hold the product, cheapest first.
func (p *Product) Holders(c *Case) []int {
	list := make([]int, len(p.Steps))
	for i := range list {
		list[i] = len(c.Resources) + i
	}
	return list
}

// In is the case with the product in it: one more shape (and model), the last ones, and one
// resource of kind demand for each price step, the last ones, which together may hold up to
// volumeMW of it, the cheapest first, and no more than its cap in any hour. The case itself stays as
// it is. activationS other than 0 takes the place of the product's own.
func (p *Product) In(c *Case, volumeMW, activationS float64) (*Case, error) {
	sh, err := p.Shape(c, activationS)
	if err != nil {
		return nil, err
	}
	if activationS == 0 {
		activationS = p.ActivationS
	}
	out := *c
	shape := len(c.Shapes)
	out.Shapes = append(slices.Clip(c.Shapes), sh)
	if m := p.model(c, activationS); m != nil {
		out.Models = append(slices.Clip(c.Models), *m)
	}
	out.Resources = slices.Clone(c.Resources)
	from := 0.0
	for i, st := range p.Steps {
		name := p.Name
		if len(p.Steps) > 1 {
			name = fmt.Sprintf("%s %d", p.Name, i+1)
		}
		out.Resources = append(out.Resources, Resource{
			Name: name, Kind: Demand, Count: 1,
			Response: Response{Shape: shape, CapMW: p.part(volumeMW, from, st.ToMW), PricePerMW: st.PricePerMW},
			Down:     Response{Shape: -1},
		})
		from = st.ToMW
	}
	return &out, nil
}

// part is what of a volume lies between two MW, hour by hour.
func (p *Product) part(volumeMW, fromMW, toMW float64) Value {
	of := func(capMW float64) float64 { return math.Max(0, math.Min(math.Min(volumeMW, capMW), toMW)-fromMW) }
	if p.CapMW.Series == nil {
		return Value{Const: of(p.CapMW.Const)}
	}
	v := Value{Series: make([]float64, len(p.CapMW.Series))}
	for h, x := range p.CapMW.Series {
		v.Series[h] = of(x)
	}
	return v
}

// MostMW is the most that there is of the product in any hour.
func (p *Product) MostMW() float64 { return p.CapMW.most() }
