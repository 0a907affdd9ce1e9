// Package worth asks what a frequency service is worth: to whom the prices of an hour pay what,
// how much of one service replaces another, and what a product that nobody holds yet would save
// over a year. It sits above solve and knows no terminal and no plots.
//
// Prices come in two ways, both from solve. Marginal prices are the duals of the hour's rows in
// the dispatch of its mix, with the commitment held. Convex hull prices are the duals of the
// relaxation over whole operating points (Dantzig–Wolfe), in which a resource may be on in part:
// the prices with the least uplift. Uplift is what a resource loses by following the schedule
// instead of its own best answer to the prices: what it must be paid to break even (make-whole)
// and what it could have earned besides (lost opportunity).
//
// The largest loss under convex hull prices: every possible loss has rows of its own, in which what
// is lost counts by its output and is paid nothing for the inertia and the response that go with
// it. In the hull a fraction of a machine is a fraction of a loss, so that where machines are the
// largest loss its hull price is low: the loss of a machine that is on by a third is a third of its
// output. The unit whose loss binds pays for it, at both prices.
package worth
