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
// Where a row is not linear (the worst place beneath a wetland moves as rates change) its change is convex in the rates; tangents
// taken at re-solved plans are kept as cuts and the loop ends (Kelley 1960, J. SIAM 8).
//
// Symbols, units, signs: Q rate [m³/d], pumping positive; change = value without pumping - value, so that pumping makes it larger;
// headroom = limit - quantity in the limit's own direction; shadow price = change of the aim per unit of the limit.
//
// The package sees no mesh and no file format. Prices hold near the plan and for this model only.
package plan
