// Package plan turns a brief and a response table into a plan: rates for the wells, what binds, what each limit is worth,
// and everything that a reviewer needs to judge them.
//
// Question answered: how much may each well pump so that every limit holds, and why this much?
//
// With linear features the change of receptor r is s_r = sum_w S_rw Q_w, S the sensitivity from one adjoint solve. The aims are
// linear programmes in the rates:
//
//	most-yield      maximise  sum of pumped rates             subject to limits, quotas, demand, bounds
//	most-headroom   maximise  smallest share of room left     for the demand, subject to the same
//
// Two are quadratic or cubic, convex, and solved by (successive) quadratic problems:
//
//	least-energy          minimise  sum_w 0.0027240694/efficiency_w Q_w (z_w + sum_j G_wj Q_j + c_w Q_w²)   for the demand [kWh/d]
//	closest-to-requests   minimise  sum_w ((Q_w - requested_w)/largest rate_w)²                            subject to the same
//
// z the lift with the decided wells at rest, G the drawdown in a well per rate of another; own wells with fixed rates are counted too. Their shadow prices are savings.
//
// For limit k with edge e_k (the limit as a change of the counted wells C_k against no pumping), size z_k and reserve f_k
//
//	side_k (sum_{w in C_k} S_kw Q_w - e_k) + (f_k + t) z_k <= 0        t = 0 for most-yield
//
// and its shadow price is the row's price times de_k/dlimit, less what a larger size keeps back. The solution is certified from the
// data; what cannot be met is explained by an irreducible set of limits and by the least relaxation.
//
// Where a row is not linear (the worst place beneath a wetland moves as rates change; the level in a bore falls by C Q|Q| besides) its change is convex in the rates; tangents
// taken at re-solved plans are kept as cuts and the loop ends (Kelley 1960, J. SIAM 8).
//
// Every limit's price is given to both sides, with the range over which it holds and what comes then, from the optimum itself (package
// convex). Of plans as good the one nearest to the present rates is taken.
//
// A decided well is off or within its range; which wells run, with rules about that, is found by branch and bound over the same rows
// (package convex), and prices are those at that switching. With the aims that are not linear a least rate is always kept.
// Firm capacity: the largest total with each well out of service in turn, from the same response.
//
// Symbols, units, signs: Q rate [m³/d], pumping positive; change = value without pumping - value, so that pumping makes it larger;
// headroom = limit - quantity in the limit's own direction; shadow price = change of the aim per unit of the limit.
//
// Several operating states are planned together, with a rate for each well in each: the year's days join them (states.go).
//
// Not done: change with time; every state is steady, and water stored between states is not counted.
//
// Sources: Maddock 1972 (Water Resources Research 8) for the response matrix; Kelley 1960 (J. SIAM 8) for cuts; Mangasarian 1979
// (Linear Algebra and its Applications 25) for other plans as good.
//
// The package sees no mesh and no file format. Prices hold near the plan and for this model only.
package plan
