// Package size says how large a resource is worth building: it solves the hours of a case with
// the resource at growing sizes, energies and activation times, and sets what the system saves
// and what the owner earns against what it costs.
//
// A design's worth depends on its energy only through the response that it lets it hold, so designs that hold
// the same are one case. Cases of one activation time form a ladder from nothing to the most,
// which study/sweep climbs hour by hour.
package size
