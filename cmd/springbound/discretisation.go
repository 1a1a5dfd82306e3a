package main

import (
	"context"
	"fmt"
	"math"
	"slices"

	"springbound/adjoint"
	"springbound/plan"
)

const (
	// mostErrorWork is up to how many nodes times functionals and wells the errors of all sensitivities and the bounds are estimated unasked:
	// about two seconds on two processors.
	mostErrorWork = 2_000_000
	// mostErrorNodes is up to how many nodes of a mesh that the project fixes the errors of changes are estimated unasked: the estimate works
	// on four times as many.
	mostErrorNodes = 60_000
	// mostRefinements bounds how often the mesh is refined for a plan: the plan that is found on the first refined mesh is nearly the last one.
	mostRefinements = 3
	// worthwhile is the share of its error that a refinement must leave at most to be followed by another one: wells and springs are resolved
	// down to their bores at some time, and nothing more is gained.
	worthwhile = 0.7
)

// accuracy is the relative error that is asked of the mesh for every receptor's change, by default half a per cent: far below what transmissivity
// and recharge are known to.
func (j *job) accuracy() float64 {
	if v := j.project.Mesh.Accuracy; v > 0 {
		return v
	}
	return adjoint.DefaultAccuracy
}

// meshIsGiven tells whether the project fixes the mesh by a number of nodes or a size and asks for no accuracy: errors are then stated, and the
// mesh is left as it is.
func (j *job) meshIsGiven() bool {
	m := j.project.Mesh
	return m.Accuracy == 0 && (m.Nodes > 0 || m.Finest > 0)
}

// errorsWanted tells whether the mesh's errors are to be estimated.
func (j *job) errorsWanted() bool {
	return j.allErrors || !j.meshIsGiven() || len(j.field.Model.Mesh.X) <= mostErrorNodes
}

// planAccurately plans, and where the mesh is too coarse for a change at that plan refines it where that matters and plans again.
func (j *job) planAccurately(ctx context.Context) (*plan.Report, error) {
	r, err := j.makePlan(ctx)
	for round := 0; err == nil && j.errorsWanted(); round++ {
		state, failed := j.field.Changes(ctx, ratesOf(r))
		if failed != nil {
			return nil, failed
		}
		if failed := j.findErrors(ctx, state); failed != nil {
			return nil, failed
		}
		worst, where := j.worstError(state)
		j.rounds = append(j.rounds, plan.MeshRound{Nodes: len(j.field.Model.Mesh.X), Worst: worst, Where: where})
		if round > 0 && !(worst <= worthwhile*j.rounds[round-1].Worst) {
			j.refinedOut = j.refinedOut || worst > j.accuracy()
		}
		if worst <= j.accuracy() || j.meshIsGiven() || j.refinedOut || round == mostRefinements {
			return r, nil
		}
		refined, failed := adjoint.Refine(ctx, &j.project.Site, j.project.Wells, j.project.Receptors, ratesOf(r), adjoint.RefineOptions{
			Accuracy: j.accuracy(), Start: j.modelOptions(j.workers),
			Progress: func(round, nodes int, worst float64) {
				j.progress.report(fmt.Sprintf("refining the mesh, %d nodes", nodes), round, round+1)
			}})
		if failed != nil {
			return nil, failed
		}
		j.refinedOut, j.linear = refined.Budget, nil
		if failed := j.watch(ctx, refined.Field.Model); failed != nil {
			return nil, failed
		}
		r, err = j.makePlan(ctx)
	}
	return r, err
}

// findErrors estimates the mesh's errors at a state and keeps them: of everything where that is asked for or cheap, else of the changes.
func (j *job) findErrors(ctx context.Context, state *adjoint.State) error {
	if j.errors != nil && slices.Equal(j.errorsAt, state.Rates) && j.errorsOn == j.field {
		return nil
	}
	all := j.allErrors || j.linear != nil && len(j.field.Model.Mesh.X)*(j.linear.Distinct+len(j.field.Wells)) <= mostErrorWork
	e, err := j.field.Errors(ctx, state, adjoint.ErrorOptions{Accuracy: j.accuracy(), Workers: j.workers, ChangesOnly: !all, SlopeBounds: all,
		Progress: func(done, total int) { j.progress.report("errors of the mesh", done, total) }})
	if err != nil {
		return err
	}
	j.errors, j.errorsAt, j.errorsOn, j.errorsOfAll = e, slices.Clone(state.Rates), j.field, all
	return nil
}

// worstError is the largest estimated error of a change, as a share of what makes the change up, and where.
func (j *job) worstError(state *adjoint.State) (worst float64, where string) {
	for i, x := range j.errors.Rows {
		if share := math.Abs(x.ChangeError) / x.Size; x.Size > 0 && (where == "" || !(share <= worst)) {
			worst, where = share, j.rowName(state.Rows[i])
		}
	}
	return worst, where
}

// rowName says what a row is about.
func (j *job) rowName(row adjoint.Row) string {
	if row.Receptor >= 0 {
		return j.field.Receptors[row.Receptor].ID
	}
	return "the level in " + j.field.Wells[row.Well].ID
}

// discretisation writes beside each receptor's change, each level in a well and each sensitivity by how much the mesh alone makes it wrong.
func (j *job) discretisation(ctx context.Context, r *plan.Report, state *adjoint.State) error {
	const name = "Error of the mesh in every receptor's change"
	if !j.errorsWanted() {
		r.NotAssessed = append(r.NotAssessed, "the mesh's error of each figure: on a mesh of this size, fixed by the project, only where plan --errors asks for it")
		notDone(r, name, "plan --errors does it")
		return nil
	}
	if err := j.findErrors(ctx, state); err != nil {
		return err
	}
	receptors, levels := map[string]*adjoint.RowError{}, map[string]*adjoint.RowError{}
	for i, row := range state.Rows {
		if row.Receptor >= 0 {
			receptors[j.field.Receptors[row.Receptor].ID] = &j.errors.Rows[i]
		} else {
			levels[j.field.Wells[row.Well].ID] = &j.errors.Rows[i]
		}
	}
	for i := range r.Receptors {
		r.Receptors[i].Discretisation = j.judge(receptors[r.Receptors[i].ID])
	}
	for i := range r.Wells {
		r.Wells[i].Discretisation = j.judge(levels[r.Wells[i].ID])
	}
	s := &r.Sensitivities
	r.SensitivityErrors = plan.Table{Receptors: s.Receptors, Units: s.Units, Wells: s.Wells, Values: [][]float64{}}
	r.SensitivityErrorBounds = r.SensitivityErrors
	if j.errorsOfAll {
		for _, id := range s.Receptors {
			r.SensitivityErrors.Values = append(r.SensitivityErrors.Values, receptors[id].SlopeError)
			r.SensitivityErrorBounds.Values = append(r.SensitivityErrorBounds.Values, receptors[id].SlopeBound)
		}
	} else {
		r.NotAssessed = append(r.NotAssessed, "the mesh's error of each sensitivity, and the bound of each change's: with so many nodes and receptors only where plan --errors asks for them; the error of each change is estimated")
	}
	j.judgeAll(r, state, name)
	return nil
}

// judge is the record of one row's error; nil where there is none.
func (j *job) judge(x *adjoint.RowError) *plan.Discretisation {
	if x == nil {
		return nil
	}
	d := &plan.Discretisation{Error: x.ChangeError, Accuracy: j.accuracy(), Met: math.Abs(x.ChangeError) <= j.accuracy()*x.Size}
	if j.errorsOfAll {
		d.Bound = &x.ChangeBound
	}
	if x.Size > 0 {
		share := x.ChangeError / x.Size
		d.Share = &share
	}
	return d
}

// judgeAll adds the check of the accuracy. A failed one does not void the plan: it says by how much, and what to do.
func (j *job) judgeAll(r *plan.Report, state *adjoint.State, name string) {
	worst, where := j.worstError(state)
	r.Mesh.Accuracy, r.Mesh.AccuracyMet = j.accuracy(), worst <= j.accuracy()
	r.Mesh.Rounds = append([]plan.MeshRound{}, j.rounds...)
	if where == "" {
		notDone(r, name, "no receptor's change is above zero")
		return
	}
	line := plan.Check{Name: name, Result: "pass", Detail: fmt.Sprintf("largest estimate %.2g %% (%s); asked for: at most %.2g %%", 100*worst, where, 100*j.accuracy())}
	if !r.Mesh.AccuracyMet {
		line.Result = "fail"
		switch {
		case j.refinedOut:
			line.Detail += "; the mesh was refined as far as its budget of nodes or the bores of wells and springs allow"
		case j.meshIsGiven():
			line.Detail += "; the project fixes the mesh: leave nodes and finest out of [mesh], or state accuracy"
		default:
			line.Detail += "; ask for more nodes in [mesh]"
		}
	}
	r.Checks = append(r.Checks, line)
}
