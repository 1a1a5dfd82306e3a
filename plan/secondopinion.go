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
}

// SecondOpinion solves the programme again by the interior-point method, which shares no step with the simplex and active-set methods, and
// compares optimum and certificates. It is not done where the programme holds whole numbers: which wells run. An error is a programme that
// cannot be solved at all.
func (f *ProblemFile) SecondOpinion(ctx context.Context) (*Opinion, error) {
	out := &Opinion{Result: notDone, Allowed: convex.OpinionAgreement}
	if len(f.Model.Integer) > 0 {
		out.Sentence = "The programme chooses which wells run; the second method takes no whole numbers. The choice's own proof stands with the plan."
		return out, nil
	}
	first, err := convex.Solve(ctx, f.Model.Problem, convex.Options{})
	if err != nil {
		return nil, err
	}
	a := convex.SecondOpinion(ctx, f.Model.Problem, first)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	out.Difference = a.Difference
	switch a.Verdict {
	case convex.Agree:
		out.Result = pass
		out.Sentence = fmt.Sprintf("Both methods call the programme %v; their optima differ by %.1e of their terms.", first.Status, a.Difference)
	case convex.Disagree:
		out.Result = failed
		out.Sentence = "The two methods disagree: " + a.Reason + "."
	default:
		out.Sentence = "There are not two answers to compare: " + a.Reason + "."
	}
	return out, nil
}
