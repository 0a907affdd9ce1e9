// Package floor says how much kinetic energy must be online: for losses and responses on a chart,
// for every hour of a case, and as a rule for all hours.
//
// A floor is what must be left after a loss (limits.Floor) or, for an hour, what must be online
// before it: the most, over the losses of a dispatch, of the floor of each and of what it takes along.
//
// The chart is found twice, from the rows and by bisection of closed-loop simulations. The year
// compares three dispatches an hour: the secure mix; one that knows the steady-state limits alone,
// which is what would run if nobody asked for inertia; and one without limits. Where the second lacks
// inertia, each way to close the gap is solved alone. Then rules are tried: the year again, with a
// least inertia online besides the limits.
package floor
