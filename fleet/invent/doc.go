// Package invent writes invented, plausible cases of any size: an isolated
// synchronous area with machines, wind, solar, batteries, demand response and import
// links over a year of hours. Nothing in it describes a real system. It serves a new
// user as a start, and tests and benchmarks as a supply of systems.
//
// The same options give the same bytes. A shorter case is the beginning of a longer
// one, as long as neither is longer than a year.
package invent
