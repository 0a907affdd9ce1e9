// Package dynamic simulates frequency in closed loop: governors and converters act on the
// frequency they measure, with deadbands, lags, limits and triggers, and relays act on it
// too. It is what the open-loop promise of package limits is held against.
//
// The model is the swing equation of the centre of inertia,
//
//	(2·E/f0)·dx/dt = lost − Σ P_i − D·x,
//
// with x the deviation below nominal in Hz (negative above nominal), E the kinetic energy
// online in MW·s, P_i the MW that resource i adds, and D the load's damping in MW/Hz, which
// shrinks with the load that is shed. Each kind of resource has a published model, see
// Model. Units with the same parameters and the same room are one: cost grows with kinds
// of machine, not with their number.
//
// # Method
//
// The explicit pair of orders 2 and 3 of Bogacki and Shampine (Applied Mathematics Letters
// 2(4), 1989, from memory) with its embedded error held to a tolerance in Hz. Steps end at
// every instant at which something is known to change its course; levels that relays and
// triggered responses watch are located within a step and end it. Responses given by a
// shape, and triggered ones once they are triggered, are straight lines between such
// instants.
package dynamic
