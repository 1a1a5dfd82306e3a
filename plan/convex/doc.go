// Package convex solves the optimisation problems of a pumping plan: linear and convex quadratic programmes with few, dense rows, and
// linear ones with wells that are on or off. Which rates give the largest yield, or the least cost or energy, within the limits, and what
// is each limit worth?
//
// # Problem
//
//	minimise or maximise  c'x + 1/2 x'Hx
//	subject to            rowLower <= A x <= rowUpper
//	                      lower    <= x   <= upper
//
// Columns are wells and a few helpers, rows are limits, quotas and demand. Any bound may be missing (an infinity of the right sign);
// equal bounds make an equation or a fixed column. Rows are dense and copied in; nothing about their number is assumed. H is symmetric,
// given as a dense matrix, as entries, or as a diagonal plus few factors; one that bends the wrong way is found out and shown.
//
// # Method for linear programmes
//
// With r = A x as further variables a basis has one variable for each row. A row whose r is basic says nothing, so that only the
// block K of the active rows by the basic columns is factored: as large as the number of binding limits, not as the number of
// limits. K is kept as Q'K = R under plane rotations (kernel). A pivot costs rows x |K| + |K| x columns + |K|².
//
// Solve runs the bounded dual simplex method from any basis. Prices of boxed columns are righted by moving the column to its
// other bound; other wrong prices are shifted away for the time being. Leaving rows are chosen by steepest edge (Forrest &
// Goldfarb 1992), the step passes over the bounds of boxed columns while that pays (Fourer 1994; Maros 2003) and ends with the
// largest entry among nearly equal breakpoints (Harris 1973). Once no bound is violated the true costs come back and a bounded
// primal simplex method removes the wrong prices that are left; it is not needed when nothing was shifted. Stalls are met by small
// perturbations, of costs in the dual and of bounds in the primal method, which are taken back before the end; when that does not
// help smallest indices are used, which cannot cycle (Bland 1977). The last basis is factored afresh (LU), its values and prices
// refined with residuals in about 32 digits, and looked at again with tolerances near rounding.
//
// # Methods for quadratic programmes
//
// A definite H goes to the dual active-set method (Goldfarb & Idnani 1983). Columns at a bound are left out: only the block H_FF of the
// free columns is factored and changed row by row, or, for a diagonal plus a rank k, a k x k matrix (Woodbury 1950); rows at a bound
// are the equations of the small system A_W H_FF^-1 A_W', which is changed alike. A first guess of the active set exchanges whole sets
// of bounds; the method proper then needs few steps or none. A step costs about |F|² + rows x columns.
//
// Everything else goes to a primal-dual interior-point method: predictor and corrector (Mehrotra 1992), centrality corrections (Gondzio
// 1996), on the sparse system [-(H+T) A'; A E], whose shifted form has a factor L D L' for every order (Vanderbei 1995); the order is
// of minimum degree (Amestoy, Davis & Duff 1996), refinement takes the shifts out again, so that free columns and dependent rows need
// no care. The end is solved for on the bounds that bind. SolveInterior runs it on any problem and SecondOpinion compares: it shares no
// step with the other two. Infeasible and unbounded problems are shown by the same method on problems that always have an optimum.
//
// # Method for whole and zero-or-within columns
//
// SolveMixed splits the problem: a whole column is at most k or at least k+1, a well is off or pumps at least its least rate, whose
// hull 0 <= x <= most needs no helper. Presolve narrows bounds and coefficients (Savelsbergh 1994). At the root cuts are added: sums of
// rows rounded (Marchand & Wolsey 2001), Gomory's (1960), lifted covers (Balas 1975, Zemel 1989). Columns to split are picked by reliability branching (Achterberg,
// Koch & Martin 2005); the tree is walked in plunges that start at the least bound or the best estimate. Plans come from rounding, dives
// and searches around the relaxation and the best plan (Danna, Rothberg & Le Pape 2005). A plan counts once it meets the data; the answer
// is that of Solve at its switching, and its prices hold there only. CertifyMixed checks the plan always, and the bound where
// MixedOptions.Proof kept the tree, without cuts and presolve.
//
// All methods work in a scaled problem; the factors are powers of two, so that scaling rounds nothing. There is no randomness
// that is not a fixed sequence and no parallel work: the same problem gives the same bytes.
//
// # Symbols, units, signs
//
//	symbol  identifier              meaning
//	c       Column.Cost             objective per unit of a column
//	A       Row.Coefficients        row value per unit of a column
//	x, r    X, RowValue             values
//	H       Hessian                 twice the objective per unit of a pair of columns
//	y       RowPrice                change of the objective per unit of the row's active bound
//	d       ReducedCost             the same for a column's active bound; c + Hx - A'y
//
// Prices are in the problem's own sense: raising the binding upper limit of a maximisation by one unit raises the objective by its
// price, which is not negative; raising a binding demand of a minimisation raises the cost by its price. The price of a bound that
// does not bind is zero. Units are those of the caller; the package knows none.
//
// # What an answer means
//
// Status is never more than the arithmetic supports, and Certify recomputes from the data alone what it claims: violations, signs,
// stationarity, slackness and gap of an optimum, the proof of infeasibility (Farkas 1902), the direction of an unbounded problem. A proof must
// show more than the tolerance on its bounds, and more than values a thousand times the largest bound make of what meets no bound.
// Where prices or plan are not the only ones Solution.PrimalDegenerate or DualDegenerate says so. Conflict, LeastRelaxation and
// Relaxer explain what cannot be met; rows with one entry, which can be named and give way, cost them no more than bounds.
//
// # Not done
//
// Sparse storage and presolve: problems with thousands of rows that are mostly zero work, slowly. On/off columns and ranges of prices with
// a Hessian. Exact arithmetic: a problem infeasible by less than 1e-9 of its scale may be called feasible, a Hessian with an eigenvalue
// below zero by less than 1e-11 of its diagonal convex.
//
// # Sources
//
// Forrest & Goldfarb (1992) Mathematical Programming 57, 341-374. Fourer (1994) Notes on the dual simplex method. Maros (2003) European
// Journal of Operational Research 149, 1-16. Harris (1973) Mathematical Programming 5, 1-28. Bland (1977) Mathematics of Operations
// Research 2, 103-107. Gill, Golub, Murray & Saunders (1974) Mathematics of Computation 28, 505-535. Chinneck & Dravnieks (1991) ORSA
// Journal on Computing 3, 157-168. Ogita, Rump & Oishi (2005) SIAM Journal on Scientific Computing 26, 1955-1988. Ruiz (2001) RAL-TR-2001-034.
// Goldfarb & Idnani (1983) Mathematical Programming 27, 1-33. Mehrotra (1992) SIAM Journal on Optimization 2, 575-601. Gondzio (1996)
// Computational Optimization and Applications 6, 137-156. Vanderbei (1995) SIAM Journal on Optimization 5, 100-113. Amestoy, Davis & Duff
// (1996) SIAM Journal on Matrix Analysis and Applications 17, 886-905. Woodbury (1950) Memorandum Report 42, Princeton.
// Savelsbergh (1994) ORSA Journal on Computing 6, 445-454. Marchand & Wolsey (2001) Operations Research 49, 363-371. Balas (1975)
// Mathematical Programming 8, 146-164. Achterberg, Koch & Martin (2005) Operations Research Letters 33, 42-54. Danna, Rothberg & Le Pape
// (2005) Mathematical Programming 102, 71-90.
package convex
