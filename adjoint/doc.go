// Package adjoint computes how every watched quantity answers to every well: sensitivities, influence fields, capture.
//
// Question answered: which wells drive each receptor, and where does each well's water come from?
//
// With the heads h from A h = b - sum_w Q_w e_w, A symmetric, and a quantity
//
//	J = c'h + d'Q + e
//
// one adjoint solve A z = c gives the derivative with respect to every rate at once (Sykes, Wilson & Andrews 1985, WRR 21(3)):
//
//	dJ/dQ_w = -z[w] + d_w
//
// z is the influence: minus the change of J per unit rate pumped anywhere. One factorisation serves the heads and all quantities;
// solves = distinct quantities + 1, whatever the number of wells.
//
// The change of a receptor is base value - value, so its sensitivity is z[w] - d_w, which is not negative for a level or an outflow on a
// mesh whose matrix is an M-matrix.
//
// Symbols, units, signs: h head [m]; Q rate [m³/d], pumping positive; c weights on heads; d direct terms: a well's own logarithm and linear
// loss in its bore's level [d/m²]; z in the quantity's unit per m³/d. Capture: the change of a feature's flow into the aquifer per unit
// rate [-]; a well's shares sum to 1.
//
// Assumes what package aquifer assumes. The largest drawdown beneath a polygon is not linear: its tangent is that of the worst place
// at the rates asked for.
package adjoint
