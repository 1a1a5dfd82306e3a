package plan

import (
	"context"
	"fmt"

	"springbound/plan/convex"
)

// Opinion is what a second method says about a plan's programme.
type Opinion struct {
	Result     string  // Pass, Fail, NotDone
	Sentence   string  // one sentence
	Difference float64 // of the two optima, relative to the sum of the absolute terms [-]
	Allowed    float64 // [-]
	Aim        float64 // the optimum, made small: a yield and a headroom with the sign turned
}

// opinionNodes bounds the search for which wells run; the plan's own search goes on for longer.
const opinionNodes = 2000

// SecondOpinion solves the programme again by the interior-point method, which shares no step with the simplex and active-set methods, and
// compares optimum and certificates. Where the programme chooses which wells run, the choice is searched for anew by branch and bound, over
// columns of whole numbers in place of the ranges that the plan branched on, and the opinion is on the rates at that choice; not done where a
// quadratic aim goes with a choice, or the search does not end in time. An error is a programme that cannot be solved at all.
func (f *ProblemFile) SecondOpinion(ctx context.Context) (*Opinion, error) {
	out := &Opinion{Result: notDone, Allowed: convex.OpinionAgreement}
	problem, first, at := f.Model.Problem, (*convex.Solution)(nil), ""
	if len(f.Model.Integer) > 0 {
		if problem.Quadratic() {
			out.Sentence = "The programme has a quadratic aim and chooses which wells run: the second method takes no such choice. The choice's own proof stands with the plan."
			return out, nil
		}
		mixed, err := convex.SolveMixed(ctx, &convex.MixedProblem{Problem: problem, Integer: f.Model.Integer}, convex.MixedOptions{NodeLimit: opinionNodes})
		if err != nil {
			return nil, err
		}
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if mixed.Status != convex.MixedOptimal || mixed.Switching == nil || mixed.Linear == nil {
			out.Sentence = fmt.Sprintf("The search for which wells run ended as %v after %d programmes. The choice's own proof stands with the plan.", mixed.Status, mixed.Nodes)
			return out, nil
		}
		problem, first, at = mixed.Switching, mixed.Linear, " at the best choice of running wells, searched for anew"
	} else {
		var err error
		if first, err = convex.Solve(ctx, problem, convex.Options{}); err != nil {
			return nil, err
		}
	}
	a := convex.SecondOpinion(ctx, problem, first)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	out.Difference, out.Aim = a.Difference, first.Objective+f.Model.Constant
	switch a.Verdict {
	case convex.Agree:
		out.Result = pass
		out.Sentence = fmt.Sprintf("Both methods call the programme %v%s; their optima differ by %.1e of their terms.", first.Status, at, a.Difference)
	case convex.Disagree:
		out.Result = failed
		out.Sentence = "The two methods disagree: " + a.Reason + "."
	default:
		out.Sentence = "There are not two answers to compare: " + a.Reason + "."
	}
	return out, nil
}
