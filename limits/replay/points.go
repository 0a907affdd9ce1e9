package replay

// Point is a corner of a trajectory that another simulation made: the deviation y in Hz
// and its slope g in Hz/s at t seconds. Where the slope jumps, two points have the same t.
// Between points a trajectory is read as the cubic with those values and slopes.
type Point = point

// At makes a point.
func At(t, y, g float64) Point { return point{t, y, g} }

// TYG gives a point's numbers back.
func (p point) TYG() (t, y, g float64) { return p.t, p.y, p.g }

// Between gives value and slope at t of the trajectory between two points.
func Between(a, b Point, t float64) (y, g float64) { return between(a, b, t) }

// Turn gives the instant and value at which the trajectory between two points turns, its
// slopes at the two being of opposite sign.
func Turn(a, b Point) (t, y float64) { return turn(a, b) }

// SteepestWindow gives the largest rise of the deviation over w seconds, per second, of all
// windows that end up to the instant until, and the start of that window; frequency was at
// rest before the first point.
func SteepestWindow(points []Point, w, until float64) (hzPerS, atS float64) {
	return steepestWindow(points, w, until)
}

// Deepest gives the largest deviation between two instants at which there are points, and
// when it is first reached.
func Deepest(points []Point, from, to float64) (y, t float64) { return deepest(points, from, to) }
