package study

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
	"gonum.org/v1/gonum/stat/distuv"
)

// Record is a recorded frequency trace: seconds from some start, and Hz.
type Record struct {
	S, Hz []float64
	n     []float64 // samples that each stands for; nil: one
}

// Estimate is one fitted number with its 95 % confidence interval.
type Estimate struct {
	Name       string
	Unit       string
	Value      float64
	Low, High  float64
	Identified bool   // false: the record says next to nothing about it
	Why        string // if not
}

// Fit is what a record says about a system.
type Fit struct {
	NominalHz float64
	LoadMW    float64
	LostMW    float64
	StartS    float64 // instant of the loss in the record
	OffsetHz  float64 // of the record before the loss
	NoiseHz   float64 // standard deviation of the residual
	Estimates []Estimate
	Used      *Record   // what was fitted
	Model     []float64 // Hz, at the instants of Used
	Residual  float64   // root of the mean square, Hz
}

// The parameters that are fitted, in this order. Positive ones are fitted as logarithms.
const (
	parInertia = iota // MW·s
	parDamping        // MW/Hz
	parGain           // MW/Hz of response
	parLag            // s of response
	parStart          // s
	parOffset         // Hz
	pars
)

var parNames = [pars][2]string{{"kinetic energy", "MW·s"}, {"load damping", "MW/Hz"}, {"response gain", "MW/Hz"}, {"response lag", "s"}, {"start of the loss", "s"}, {"offset before it", "Hz"}}

// DefaultAfterS is how much of a record is fitted: by then primary response is out and slower
// reserves, which the model does not have, are not.
const DefaultAfterS = 40

// ErrNoEvent says that a record holds no event that could be fitted.
var ErrNoEvent = errors.New("the record holds no event: frequency never leaves what it was before by more than its own noise")

// Match fits kinetic energy, load damping, gain and lag of the response, the instant of the loss
// and the offset of the record to a recorded trace after lostMW were lost. The model is the
// swing equation with damping and one response of first order,
//
//	(2·E/f0)·x' = P − D·x − y,   T·y' = G·x − y,
//
// solved in closed form. Damping and gain act alike once the lag has passed, so a record tells
// them apart only if it is quick and quiet enough; what it cannot tell is said to be so. The
// fit is a least-squares fit (gonum's optimize), its intervals come from the curvature at the
// optimum, with the noise's own correlation in time allowed for.
//
// Only the first afterS seconds after the loss are fitted; 0: DefaultAfterS.
func Match(r *Record, nominalHz, loadMW, lostMW, afterS float64) (*Fit, error) {
	if afterS == 0 {
		afterS = DefaultAfterS
	}
	r = clean(r)
	if len(r.S) < 20 {
		return nil, fmt.Errorf("the record has %d usable samples, want at least 20", len(r.S))
	}
	if lostMW == 0 || math.IsNaN(lostMW) || math.IsInf(lostMW, 0) {
		return nil, fmt.Errorf("--lost is %g MW, want what was lost (negative: load)", lostMW)
	}
	if gap := usualGap(r); gap > 1.05 {
		return nil, fmt.Errorf("the record has a sample every %.3g s, want one a second or more often, times in seconds", gap)
	} else if gap < 0.001 {
		return nil, fmt.Errorf("the record has a sample every %.3g s, want times in seconds", gap)
	}
	start, offset, noise, err := findEvent(r, nominalHz)
	if err != nil {
		return nil, err
	}
	if err := sideOf(r, start, offset+nominalHz, lostMW); err != nil {
		return nil, err
	}
	use := thin(window(r, start, afterS), start)
	m := &matcher{r: use, f0: nominalHz, lost: lostMW}
	best, err := m.fit(start, offset)
	if err != nil {
		return nil, err
	}
	f := &Fit{NominalHz: nominalHz, LoadMW: loadMW, LostMW: lostMW, Used: use}
	res := m.residuals(best)
	f.Model = make([]float64, len(use.S))
	ss := 0.0
	for i, e := range res {
		f.Model[i] = m.model(best, use.S[i])
		ss += e * e
	}
	f.Residual = math.Sqrt(ss / float64(len(res)))
	f.NoiseHz = noise
	f.StartS, f.OffsetHz = best[parStart], best[parOffset]
	m.intervals(f, best, res)
	return f, nil
}

// usualGap is the median time between samples, s.
func usualGap(r *Record) float64 {
	gaps := make([]float64, 0, len(r.S))
	for i := 1; i < len(r.S); i++ {
		gaps = append(gaps, r.S[i]-r.S[i-1])
	}
	slices.Sort(gaps)
	return gaps[len(gaps)/2]
}

// sideOf refuses a loss whose sign the record contradicts: the loss of infeed lowers frequency.
func sideOf(r *Record, start, level, lostMW float64) error {
	furthest := 0.0
	for i := range r.S {
		if d := level - r.Hz[i]; r.S[i] > start && r.S[i] < start+10 && math.Abs(d) > math.Abs(furthest) {
			furthest = d
		}
	}
	if furthest*lostMW < 0 {
		way := "rises"
		if furthest > 0 {
			way = "falls"
		}
		return fmt.Errorf("frequency %s after the event, which %g MW lost do not explain (negative: load)", way, lostMW)
	}
	return nil
}

// clean drops samples that are no number and puts the rest in order of time, one a moment.
func clean(r *Record) *Record {
	idx := make([]int, 0, len(r.S))
	for i := range r.S {
		if !math.IsNaN(r.S[i]) && !math.IsNaN(r.Hz[i]) && !math.IsInf(r.S[i], 0) && !math.IsInf(r.Hz[i], 0) {
			idx = append(idx, i)
		}
	}
	sort.SliceStable(idx, func(a, b int) bool { return r.S[idx[a]] < r.S[idx[b]] })
	out := &Record{}
	for _, i := range idx {
		if n := len(out.S); n > 0 && out.S[n-1] == r.S[i] {
			continue
		}
		out.S, out.Hz = append(out.S, r.S[i]), append(out.Hz, r.Hz[i])
	}
	return out
}

// findEvent looks for the instant at which frequency leaves what it was: the rise of the
// deviation that stands out most from the noise, traced back to where it began.
func findEvent(r *Record, nominalHz float64) (start, offset, noise float64, err error) {
	// Noise: the median of the changes between neighbours, whatever the event does.
	d := make([]float64, 0, len(r.Hz))
	for i := 1; i < len(r.Hz); i++ {
		d = append(d, math.Abs(r.Hz[i]-r.Hz[i-1]))
	}
	slices.Sort(d)
	noise = max(d[len(d)/2]/0.954, 1e-6) // the median of |N(0, √2·σ)| is 0.954·σ
	// The half second (or three samples) before and after each instant.
	type jump struct {
		at   int
		size float64
	}
	best := jump{}
	var steps []float64 // the changes themselves, of which an event's stands out
	for i := 3; i+3 < len(r.S); i++ {
		a, na := meanOf(r, r.S[i]-2, r.S[i], i-3, i)
		b, nb := meanOf(r, r.S[i], r.S[i]+2, i, i+3)
		if na == 0 || nb == 0 {
			continue
		}
		steps = append(steps, math.Abs(b-a))
		if z := math.Abs(b-a) / (noise * math.Sqrt(1/na+1/nb)); z > best.size {
			best = jump{i, z}
		}
	}
	if best.size == 0 {
		return 0, 0, 0, ErrNoEvent
	}
	slices.Sort(steps)
	// Frequency wanders: its largest change in two seconds is some five times the usual one.
	if largest, usual := steps[len(steps)-1], steps[len(steps)/2]; largest < 8*usual {
		return 0, 0, 0, ErrNoEvent
	}
	// Before it: the level, and how much slow drift there is anyway.
	at := r.S[best.at]
	var before []float64
	for i := range r.S {
		if r.S[i] < at-1 && r.S[i] > at-31 {
			before = append(before, r.Hz[i])
		}
	}
	if len(before) < 3 { // it begins with the event
		before = r.Hz[:3]
	}
	level := mean(before)
	spread := noise
	for _, v := range before {
		spread = max(spread, math.Abs(v-level)/3)
	}
	deepest := 0.0
	for i := range r.S {
		if r.S[i] >= at-1 && r.S[i] <= at+20 {
			deepest = max(deepest, math.Abs(r.Hz[i]-level))
		}
	}
	if deepest < 10*spread || deepest < 0.01 {
		return 0, 0, 0, ErrNoEvent
	}
	// Back to where it left the level.
	start = at
	for i := best.at; i > 0; i-- {
		if math.Abs(r.Hz[i]-level) < 3*spread {
			start = r.S[i]
			break
		}
		start = r.S[i]
	}
	return start, level - nominalHz, noise, nil
}

// meanOf is the mean between two instants, of at least the samples from i to j.
func meanOf(r *Record, from, to float64, i, j int) (m, n float64) {
	for i > 0 && r.S[i-1] >= from {
		i--
	}
	for j < len(r.S) && r.S[j] < to {
		j++
	}
	for k := max(i, 0); k < min(j, len(r.S)); k++ {
		m += r.Hz[k]
		n++
	}
	if n > 0 {
		m /= n
	}
	return m, n
}

func mean(v []float64) float64 {
	s := 0.0
	for _, x := range v {
		s += x
	}
	return s / float64(len(v))
}

// window is the part of a record from a little before an event to some seconds after it.
func window(r *Record, start, after float64) *Record {
	out := &Record{}
	for i := range r.S {
		if r.S[i] >= start-10 && r.S[i] <= start+after {
			out.S, out.Hz = append(out.S, r.S[i]), append(out.Hz, r.Hz[i])
		}
	}
	return out
}

// thin joins samples that say the same: far from the event all within a tenth of a second.
func thin(r *Record, start float64) *Record {
	const farS, blockS = 4, 0.1
	out := &Record{}
	for i := 0; i < len(r.S); {
		j := i + 1
		if near := r.S[i] > start-1 && r.S[i] < start+farS; !near {
			for j < len(r.S) && r.S[j] < r.S[i]+blockS {
				j++
			}
		}
		n := float64(j - i)
		out.S, out.Hz, out.n = append(out.S, mean(r.S[i:j])), append(out.Hz, mean(r.Hz[i:j])), append(out.n, n)
		i = j
	}
	return out
}

type matcher struct {
	r    *Record
	f0   float64
	lost float64
}

// deviation is x(t) below nominal after the loss, in closed form: the roots of
// s² + (a + 1/T)·s + (a + b)/T with a = k·D, b = k·G, k = f0/(2E).
func deviation(t, f0, lost, inertia, damping, gain, lag float64) float64 {
	if t <= 0 {
		return 0
	}
	k := f0 / (2 * inertia)
	a, b := k*damping, k*gain
	p, q := a+1/lag, (a+b)/lag
	end := lost / (damping + gain) // where it settles
	// x = end + e^(−p·t/2)·(A·c(t) + B·s(t)), x(0) = 0, x'(0) = k·P.
	h := p*p/4 - q
	aa := -end
	v := k*lost + aa*p/2 // x'(0) = −A·p/2 + B·w
	decay := math.Exp(-p * t / 2)
	switch {
	case h < -1e-12:
		w := math.Sqrt(-h)
		return end + decay*(aa*math.Cos(w*t)+v/w*math.Sin(w*t))
	case h > 1e-12:
		w := math.Sqrt(h)
		return end + 0.5*((aa+v/w)*math.Exp((w-p/2)*t)+(aa-v/w)*math.Exp((-w-p/2)*t))
	}
	return end + decay*(aa+v*t)
}

// model is the frequency of the model at an instant of the record.
func (m *matcher) model(x []float64, t float64) float64 {
	return m.f0 + x[parOffset] - deviation(t-x[parStart], m.f0, m.lost, x[parInertia], x[parDamping], x[parGain], x[parLag])
}

// residuals are record less model, Hz, each weighed so that its noise is that of one sample.
func (m *matcher) residuals(x []float64) []float64 {
	out := make([]float64, len(m.r.S))
	for i, t := range m.r.S {
		out[i] = math.Sqrt(m.r.n[i]) * (m.r.Hz[i] - m.model(x, t))
	}
	return out
}

// free and bound go between parameters and what the optimiser sees.
func free(x []float64) []float64 {
	out := slices.Clone(x)
	for _, i := range []int{parInertia, parDamping, parGain, parLag} {
		out[i] = math.Log(max(x[i], 1e-12))
	}
	return out
}

func bound(z []float64) []float64 {
	out := slices.Clone(z)
	for _, i := range []int{parInertia, parDamping, parGain, parLag} {
		out[i] = math.Exp(min(max(z[i], -30), 30))
	}
	return out
}

// fit looks for the least sum of squares from several starts.
func (m *matcher) fit(start, offset float64) ([]float64, error) {
	// First guesses: the early slope for the inertia, the lowest for what carries the loss.
	deepest := 0.0
	for i := range m.r.S {
		if m.r.S[i] > start {
			deepest = max(deepest, math.Abs(m.f0+offset-m.r.Hz[i]))
		}
	}
	slope := m.slope(start, offset)
	stiff := math.Abs(m.lost) / max(deepest, 1e-3)
	var best []float64
	least := math.Inf(1)
	problem := optimize.Problem{Func: func(z []float64) float64 {
		s := 0.0
		for _, e := range m.residuals(bound(z)) {
			s += e * e
		}
		if math.IsNaN(s) || math.IsInf(s, 0) {
			return 1e300
		}
		return 1e6 * s / float64(len(m.r.S)) // mHz²
	}}
	for _, scale := range []float64{0.6, 1, 1.7} {
		for _, lag := range []float64{1, 4} {
			z := free([]float64{scale * m.f0 * math.Abs(m.lost) / (2 * max(slope, 1e-4)), 0.2 * stiff, 1.2 * stiff, lag, start, offset})
			for range 2 { // the simplex method stalls; started anew it goes on
				got, err := optimize.Minimize(problem, z, &optimize.Settings{MajorIterations: 1500, Converger: &optimize.FunctionConverge{Absolute: 1e-12, Relative: 1e-10, Iterations: 150}}, &optimize.NelderMead{SimplexSize: 0.2})
				if got == nil {
					return nil, fmt.Errorf("the fit failed: %w", err)
				}
				z = got.X
				if got.F < least {
					least, best = got.F, slices.Clone(got.X)
				}
			}
		}
	}
	if best == nil {
		return nil, errors.New("the fit found no parameters")
	}
	return bound(best), nil
}

// slope is the early fall of the record, Hz/s.
func (m *matcher) slope(start, offset float64) float64 {
	for i := range m.r.S {
		if t := m.r.S[i] - start; t > 0.4 {
			return math.Abs(m.f0+offset-m.r.Hz[i]) / t
		}
	}
	return 0.1
}

// intervals fills in the estimates: the curvature of the fit gives their covariance, scaled up
// for noise that is correlated from sample to sample.
func (m *matcher) intervals(f *Fit, best, res []float64) {
	n := len(res)
	z := free(best)
	jac := mat.NewDense(n, pars, nil)
	for j := range pars {
		step := 1e-4
		if j == parStart {
			step = 1e-3
		}
		a, b := slices.Clone(z), slices.Clone(z)
		a[j] += step
		b[j] -= step
		ra, rb := m.residuals(bound(a)), m.residuals(bound(b))
		for i := range n {
			jac.Set(i, j, (ra[i]-rb[i])/(2*step))
		}
	}
	ss := 0.0
	for _, e := range res {
		ss += e * e
	}
	variance := ss / float64(max(n-pars, 1))
	// Correlated noise carries less than n samples' worth: the usual factor for a first-order process.
	rho := correlation(res)
	inflate := math.Sqrt((1 + rho) / (1 - rho))
	var jtj mat.Dense
	jtj.Mul(jac.T(), jac)
	// Scaled to a unit diagonal, so that its condition says what the record tells apart.
	scale := make([]float64, pars)
	for j := range scale {
		scale[j] = math.Sqrt(max(jtj.At(j, j), 1e-300))
	}
	for i := range pars {
		for j := range pars {
			jtj.Set(i, j, jtj.At(i, j)/(scale[i]*scale[j]))
		}
		jtj.Set(i, i, jtj.At(i, i)+1e-12)
	}
	var inv mat.Dense
	singular := inv.Inverse(&jtj) != nil
	q := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(max(n-pars, 1))}.Quantile(0.975)
	for j := range pars {
		e := Estimate{Name: parNames[j][0], Unit: parNames[j][1], Value: best[j], Identified: true}
		sd := math.Inf(1)
		if !singular {
			sd = math.Sqrt(max(inv.At(j, j), 0)*variance) / scale[j] * inflate
		}
		switch j {
		case parStart, parOffset:
			e.Low, e.High = best[j]-q*sd, best[j]+q*sd
		default:
			e.Low, e.High = best[j]*math.Exp(-q*sd), best[j]*math.Exp(q*sd)
			if !(q*sd < math.Log(3)) {
				e.Identified = false
				e.Why = "the record cannot tell it: anything between its bounds fits as well"
			}
		}
		f.Estimates = append(f.Estimates, e)
	}
	if d, g := &f.Estimates[parDamping], &f.Estimates[parGain]; !d.Identified || !g.Identified {
		why := fmt.Sprintf("after the lag it acts like the other; together they are %.4g MW/Hz", d.Value+g.Value)
		for _, e := range []*Estimate{d, g} {
			if !e.Identified {
				e.Why = why
			}
		}
	}
}

// correlation is that of neighbouring residuals, held within [0, 0.95].
func correlation(res []float64) float64 {
	a, b := 0.0, 0.0
	for i := 1; i < len(res); i++ {
		a += res[i] * res[i-1]
		b += res[i-1] * res[i-1]
	}
	if b == 0 {
		return 0
	}
	return min(max(a/b, 0), 0.95)
}
