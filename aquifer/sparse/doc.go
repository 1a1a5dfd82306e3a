// Package sparse answers: what are the heads and the adjoint fields of a flow model, for one right-hand side or for
// hundreds, once its symmetric matrix is known?
//
// # Equations
//
//	A x = b,  A symmetric positive definite,  P A Pᵀ = L Lᵀ
//
// # Method
//
// Three values follow each other: a [Pattern] is analysed once into a [Symbolic], a Symbolic with values gives a
// [Factor], a Factor solves any number of right-hand sides.
//
// Ordering. Nested dissection (George 1973; Lipton, Rose & Tarjan 1979): the nodes are swept along four directions of
// the plane, in small parts along two, the position with the smallest vertex separator near the median by count is
// taken, the cut edges are covered by the fewest nodes (König 1931; Hopcroft & Karp 1973) and the separator is improved
// by moving single nodes (Fiduccia & Mattheyses 1982). Parts of a few hundred nodes are ordered by approximate minimum
// degree (Amestoy, Davis & Duff 1996) with their surroundings as a halo that counts in the degrees and is not eliminated
// (Pellegrini, Roman & Amestoy 2000). Without coordinates, and up to a thousand rows, minimum degree orders the whole
// graph.
//
// Analysis. Elimination tree (Liu 1990), column counts (Gilbert, Ng & Peyton 1994), supernodes with relaxed
// amalgamation (Ashcraft & Grimes 1989), rows of each supernode from row subtrees.
//
// Factor. Multifrontal (Duff & Reid 1983): the update matrix of each child is added into its parent's front in a
// fixed order; dense partial Cholesky in blocks of columns.
//
// Solve. Right-hand sides go through the factor in panels of fixed width; a column's result does not depend on the
// panel that it sits in. Supernodes that no entry other than zero leads to are passed over on the way up, so that a
// right-hand side with few entries walks only their paths of the elimination tree to the root; where few entries of the
// solutions are wanted, the way back walks theirs alone (Gilbert 1994). A panel holds the rows of one subtree at a
// time and the rows that subtrees share, some tenth of all, and stays in the caches.
//
// Memory. [Symbolic.FactorBytes], [Symbolic.PeakBytes] and [Symbolic.SolveBytes] tell after the analysis what the rest
// takes.
//
// # Symbols
//
//	n      number of unknowns                     N
//	A      the matrix, lower triangle by columns  Pattern, Values
//	L      Cholesky factor                        Factor
//	P      permutation                            Symbolic.Permutation
//
// Units are the caller's: with a conductance matrix in [m²/d] and flows in [m³/d] a solution is a head in [m].
//
// # Same bytes
//
// The task graph comes from the analysis, children merge in a fixed order and every sum has a fixed order, so results
// are the same to the last bit for any number of workers. Processors with AVX use assembly that multiplies and subtracts
// in the portable code's order, so that it gives the portable code's bits.
//
// # Assumptions, and what is not done
//
// A is symmetric and positive definite; anything else, NaN included, ends in [NotPositiveDefinite]. There is no
// pivoting, no indefinite factorisation, no complex arithmetic, no iterative method but refinement.
//
// # Sources
//
// Amestoy, Davis & Duff 1996, SIAM J. Matrix Anal. Appl. 17(4). Ashcraft & Grimes 1989, ACM TOMS 15(4). Duff & Reid 1983, ACM TOMS 9(3).
// Fiduccia & Mattheyses 1982, 19th Design Automation Conf. George 1973, SIAM J. Numer. Anal. 10(2). Gilbert 1994, SIAM J. Matrix
// Anal. Appl. 15(1). Gilbert, Ng & Peyton 1994, SIAM J. Matrix Anal. Appl. 15(4). Hopcroft & Karp 1973, SIAM J. Comput. 2(4).
// Lipton, Rose & Tarjan 1979, SIAM J. Numer. Anal. 16(2). Liu 1990, SIAM J. Matrix Anal. Appl. 11(1). Pellegrini, Roman & Amestoy
// 2000, Concurrency 12(2-3).
package sparse
