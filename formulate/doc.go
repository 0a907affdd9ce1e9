// Package formulate turns one hour of a case and its frequency limits into rows and
// columns: the operating points of every unit, the balance, and one linear row for
// each (loss, instant) that the optimiser asks for. It knows no algorithm.
//
// Quantities of one unit, per hour: output in MW, kinetic energy in MW·s, response in
// MW of one shape. A row is linear in these three; see Row.
package formulate
