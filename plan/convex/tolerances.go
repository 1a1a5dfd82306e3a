package convex

// Tolerances of the pivoting, all in the scaled problem, whose entries, costs and bounds are near 1.
const (
	// feasibilityTolerance is the violation of a bound b that counts as none, per max(1, |b|): a thousand times the rounding of
	// a basic value on problems with condition 1e4.
	feasibilityTolerance = 1e-9
	// optimalityTolerance is the wrong-signed price that counts as none.
	optimalityTolerance = 1e-9
	// sharpTolerance replaces both once an optimum is found, so that the basis is the optimal one wherever rounding, some 1e-13,
	// allows to tell; where it does not the optimum found before stands.
	sharpTolerance = 1e-11
	// sharpRounds bounds the attempt.
	sharpRounds = 3
	// pivotTolerance is the smallest entry that may become a pivot: below it rounding of the row, some 1e-13, would spoil the
	// step in its fourth digit.
	pivotTolerance = 1e-9
	// steadyPivot is the entry that is preferred: smaller ones are taken only where no breakpoint passed before offers one.
	steadyPivot = 1e-5
	// pivotAgreement is the relative difference between the pivot from the row and from the column that asks for a new
	// factorisation.
	pivotAgreement = 1e-7
	// weightFloor keeps steepest-edge weights, which are squares of norms, positive under rounding.
	weightFloor = 1e-4
	// stallLength is the number of pivots without progress after which costs are perturbed, resp. smallest-index rules take over.
	stallLength = 60
	// perturbation is the size of the first cost perturbation relative to 1 + |cost|, well above optimalityTolerance and small
	// enough for the prices to stay nearly right; each further one is ten times as large, up to perturbationLargest.
	perturbation        = 1e-7
	perturbationLargest = 1e-3
	// boundPerturbation is the size of the first widening of bounds relative to 1 + |bound| when the primal method stalls; each
	// further one is ten times as large, up to perturbationLargest.
	boundPerturbation = 1e-7
	// farAway is the distance of a leaving value from its bound beyond which the digits lost on the way back, seven and more, are
	// restored by computing all values anew.
	farAway = 1e7
	// refactorEvery is the number of changes of the kernel after which it is factored afresh.
	refactorEvery = 400
	// proofMargin is the least distance from feasible, relative to the sum of absolute terms, that a proof of infeasibility must
	// show: what feasibilityTolerance on the bounds in it could explain.
	proofMargin = feasibilityTolerance
	// negligibleShare is the multiplier of an unbounded value, relative to the largest multiplier, that counts as zero.
	negligibleShare = 1e-9
	// maxRounds bounds how often the dual and the primal method hand over to each other.
	maxRounds = 12
)
