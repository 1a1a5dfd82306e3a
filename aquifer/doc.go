// Package aquifer holds the site and the steady confined flow model.
//
// Question answered: which head does the aquifer settle to, where does its water come from and go to, and which sparse
// symmetric positive definite system says so?
//
//	div(T grad h) + N + (h_source - h)/c - sum_w Q_w delta(x - x_w) + exchange(rivers, lakes, springs) = 0
//
// with, on the outline, prescribed head, prescribed flux per length, head-dependent exchange per length, and no flow where
// nothing is said.
//
// Discrete form. Nodes of a conforming Delaunay triangulation, one control volume a node; the flux between nodes i and j is
// C_ij (h_i - h_j) with C_ij = sum over the edge's triangles of T cot(opposite angle)/2, which is the linear interpolant's flux
// through the perpendicular bisectors (Bank & Rose 1987, SIAM J. Numer. Anal. 24(4), box method); in an anisotropic triangle the
// cotangents are those in the metric of the inverse tensor. Recharge, leakage, rivers, lakes and head-dependent edges are lumped
// at nodes, so the matrix stays an M-matrix. Prescribed heads are eliminated; the flow through them is the residual of their row.
//
// Finer is the model on the mesh with every triangle cut into four, assembled from the same site and solved without a factor of its own; Corners
// lists where the gradient of head has no limit. Both serve estimates of the discretisation error (package adjoint).
//
// Symbols, units, signs: h head [m]; T transmissivity [m²/d]; N recharge [m/d]; c leakage resistance [d]; Q rate [m³/d],
// positive out; flows in a balance are positive into the aquifer [m³/d].
//
// Assumptions: steady, confined, a single layer, T independent of head. Exchange is linear in head down to a stated level and constant
// below it: a spring below its outlet, a river or lake below its bed, leakage below the confining layer's base. Heads solves the linear
// problem in which every feature acts; Settle finds the state with those that switch, the minimum of a strictly convex energy.
//
// A Ledger books the water of every control volume anew from the site's records, and takes no number from the matrix: what an audit compares
// with.
//
// The package knows no file format and no unit other than metre and day.
package aquifer
