// Package limits holds the physics of frequency security: response shapes, the
// corridor that frequency must stay in after a loss, and the instants at which a
// mix comes nearest to leaving it. It knows no files, no fleet and no optimiser.
//
// The model is the swing equation of the centre of inertia,
//
//	(2·E/f0)·d(dev)/dt = P − Σ R_s·φ_s(t) − D·dev,
//
// with dev the deviation below nominal in Hz, E the kinetic energy left online in
// MW·s, P the MW lost, R_s the MW held with shape φ_s and D the load's damping in
// MW/Hz. Response is a promise (open loop): its recovery is never banked above
// nominal, so dev is held at or above zero (a reflected trajectory).
//
// Integrating over [s, t] with the weight exp(−a0·(t−τ)), where a0 is a lower
// bound of D·f0/(2·E), gives one linear row for every pair of instants:
//
//	(2·X/f0)·E + Σ R_s·∫ₛᵗ e^(−a0(t−τ))·φ_s dτ ≥ P·∫ₛᵗ e^(−a0(t−τ)) dτ,
//
// X being the largest drop allowed between s and t. It is safe for every s: let s
// be the last instant with dev = 0; from there on dev ≥ 0, so a larger damping only
// lowers it.
//
// A RoCoF limit ρ over a window w is the same row without damping (a0 = 0), with
// t − s ≤ w and X = ρ·w. Intervals shorter than the window count because a window may
// begin before the loss, or while frequency is held at nominal. An instantaneous RoCoF
// limit and the equilibrium in the steady band are rows at one instant.
//
// Row writes these rows; Scan finds the instants at which they matter.
package limits
