package limits

// Kind names one of the three frequency limits.
type Kind uint8

// The limits, in the order in which reports list them.
const (
	RoCoF Kind = iota
	Nadir
	Steady
	Kinds = 3
)

// Word names a limit in text; String names it in files.
func (k Kind) Word() string {
	return [...]string{"RoCoF", "nadir", "steady"}[k]
}

// WordAbove names the limit's mirror above nominal in text.
func (k Kind) WordAbove() string {
	return [...]string{"RoCoF upwards", "peak", "steady above"}[k]
}

func (k Kind) String() string {
	return [...]string{"rocof", "nadir", "steady"}[k]
}

// Limits is the corridor of one synchronous area.
type Limits struct {
	NominalHz float64 // f0

	MaxHzPerS float64 // largest rate of change of frequency
	WindowS   float64 // over which it is measured; 0 = instantaneous

	NadirHz float64 // largest deviation below nominal at any time

	SteadyHz     float64 // largest deviation from SteadyByS on
	SteadyByS    float64 // by when frequency must be back within SteadyHz
	SteadyUntilS float64 // how long it must be able to stay there (then restoration takes over)
}
