package plan

import (
	"context"
	"fmt"
)

// blockModel answers for all operating states at once: each row answers to the rates of its own state only.
type blockModel struct {
	expansion *expansion
	models    []Model
	known     [][]*Response // by state, the answers so far
}

// model makes the model of an expanded brief. A model that knows no states answers for all of them where recharge is the same.
func (e *expansion) model(m Model) (*blockModel, error) {
	out := &blockModel{expansion: e, known: make([][]*Response, len(e.parts))}
	several, ok := m.(StateModel)
	for k, s := range e.outer.States {
		switch {
		case ok:
			out.models = append(out.models, several.InState(k))
		case s.RechargeFactor != e.outer.States[0].RechargeFactor:
			return nil, &DataError{Problems: []string{fmt.Sprintf("the operating state %q has another recharge, and the response is known for one only", s.Name)}}
		default:
			out.models = append(out.models, m)
		}
	}
	return out, nil
}

// Linearise answers at rates of all states, state by state.
func (m *blockModel) Linearise(ctx context.Context, rates []float64) (*Response, error) {
	n := len(m.expansion.outer.Wells)
	var parts []*Response
	for k := range m.models {
		r, err := m.one(ctx, k, rates[k*n:(k+1)*n])
		if err != nil {
			return nil, fmt.Errorf("operating state %q: %w", m.expansion.parts[k].name, err)
		}
		parts = append(parts, r)
	}
	return m.expansion.join(parts)
}

// one asks a state's model, unless it has answered at these rates before.
func (m *blockModel) one(ctx context.Context, k int, rates []float64) (*Response, error) {
	for _, r := range m.known[k] {
		if sameRates(r.At, rates) {
			return r, nil
		}
	}
	r, err := m.models[k].Linearise(ctx, append([]float64(nil), rates...))
	if err == nil && len(r.At) == len(rates) {
		m.known[k] = append(m.known[k], r)
	}
	return r, err
}

// join puts the responses of the states together: block by block, with slopes of zero between them.
func (e *expansion) join(parts []*Response) (*Response, error) {
	out := &Response{WellHeads: []float64{}}
	columns := 0
	for _, r := range parts {
		columns += len(r.Wells)
	}
	first := 0
	for k, r := range parts {
		for j, id := range r.Wells {
			out.Wells = append(out.Wells, id+mark(k))
			if j < len(r.At) {
				out.At = append(out.At, r.At[j])
			}
		}
		if r.WellHeads == nil || out.WellHeads == nil {
			out.WellHeads = nil
		} else {
			out.WellHeads = append(out.WellHeads, r.WellHeads...)
		}
		for _, row := range r.Rows {
			if row.State != "" && row.State != e.parts[k].name {
				continue
			}
			if len(row.Slope) != len(r.Wells) {
				return nil, &DataError{Problems: []string{fmt.Sprintf("operating state %q: response row %q has %d slopes for %d wells", e.parts[k].name, row.Receptor+row.Well, len(row.Slope), len(r.Wells))}}
			}
			slope := make([]float64, columns)
			copy(slope[first:], row.Slope)
			row.Slope, row.State = slope, ""
			if row.Receptor != "" {
				row.Receptor += mark(k)
			} else {
				row.Well += mark(k)
			}
			out.Rows = append(out.Rows, row)
		}
		first += len(r.Wells)
	}
	return out, nil
}
