// Package solve finds the cheapest mix of an hour and proves how near to the cheapest
// it is, over rows and columns that formulate makes; checks the mix in the time domain;
// and does so for the hours of a year.
//
// An hour is solved by branch and bound over linear relaxations of its columns. The
// relaxation is weak while the size of the largest loss floats, because a fraction of a
// machine is a fraction of a loss. So a node holds an interval [low, high] of the
// largest loss that hangs on a commitment: under high no operating point exceeds it, and
// every limit must hold after a loss of low, whoever it is. Where the relaxation still
// hides a loss in a fraction of a machine that interval is split, otherwise the number
// of units on. Frequency rows are found as they are broken, at the instant and for the
// loss where the candidate's own trajectory breaks the corridor worst.
package solve
