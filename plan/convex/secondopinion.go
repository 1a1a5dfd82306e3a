package convex

import (
	"context"
	"fmt"
	"math"
)

// Verdict is the outcome of a second opinion.
type Verdict int

// The verdicts.
const (
	Agree     Verdict = iota + 1 // both answers say the same and both certificates are accepted
	Disagree                     // both answers stand by themselves and differ: one of them is wrong
	Undecided                    // there are not two answers to compare
)

// String returns the name of the verdict.
func (v Verdict) String() string {
	switch v {
	case Agree:
		return "agree"
	case Disagree:
		return "disagree"
	case Undecided:
		return "undecided"
	}
	return fmt.Sprintf("Verdict(%d)", int(v))
}

// Agreement compares a solution with that of another method.
type Agreement struct {
	Verdict    Verdict
	Reason     string  // one sentence; empty when they agree
	Difference float64 // of the two objectives, relative to the sum of the absolute terms of the first [-]
	Violation  float64 // largest violation of a limit by the second answer, relative to its terms [-]
	Second     *Solution
}

// OpinionAgreement is the difference of objectives, relative to the sum of their absolute terms, that counts as none: each answer is
// certified to a gap of CertifiedGap and to violations of CertifiedPrimal, which the prices of limits carry into the objective.
const OpinionAgreement = 1e-8

// SecondOpinion solves p by the interior-point method, which shares no step with the simplex and active-set methods, and compares. For a
// quadratic problem whose Hessian is not definite Solve itself uses the interior-point method; the second opinion then takes another
// scaling, which is less independent, and rests on the two certificates. A cancelled context gives Undecided.
func SecondOpinion(ctx context.Context, p *Problem, s *Solution) Agreement {
	if c := Certify(p, s); !c.Accepted {
		return Agreement{Verdict: Undecided, Reason: "the first answer is not certified: " + c.Reason}
	}
	if s.Status == NotConvex {
		return Agreement{Verdict: Agree, Second: s}
	}
	second := opinion(ctx, p)
	a := Agreement{Second: second, Verdict: Undecided}
	c := Certify(p, second)
	a.Violation = c.PrimalViolationScaled
	if !c.Accepted {
		a.Reason = "the second method came to no certified answer: " + c.Reason
		return a
	}
	if second.Status != s.Status {
		a.Verdict = Disagree
		a.Reason = fmt.Sprintf("one method calls the problem %v, the other %v", s.Status, second.Status)
		return a
	}
	a.Verdict = Agree
	if s.Status != Optimal {
		return a
	}
	_, _, _, terms := p.slope(s.X)
	terms = math.Max(terms, worthShare*measure(p).worth)
	for j, x := range s.X {
		terms += math.Abs(p.anyColumn(j).Cost * x)
	}
	a.Difference = share(math.Abs(s.Objective-second.Objective), math.Max(terms, math.Abs(second.Objective)))
	if !(a.Difference <= OpinionAgreement) {
		a.Verdict = Disagree
		a.Reason = fmt.Sprintf("the objectives %.15g and %.15g differ by %.3g", s.Objective, second.Objective, a.Difference)
	}
	return a
}

// opinion runs the interior-point method, for a Hessian that only it can take with the scalings in the other order.
func opinion(ctx context.Context, p *Problem) *Solution {
	if p.hessian != nil {
		if c := p.curvature(); c.convex && !c.strict {
			first := interiorAttempt(ctx, buildForm(p, c.form, typicalShares[1]), Options{})
			if first.Status != NumericalTrouble {
				return first
			}
		}
	}
	s, _ := SolveInterior(ctx, p, Options{}) // the zero options are valid
	return s
}
