package aquifer

import (
	"context"
	"math"
)

// addSprings puts the springs on the matrix's diagonal. A spring lets out C (head on a circle of its effective radius -
// outlet level); in terms of the node's head that is C_eff (h - outlet) with
//
//	C_eff = C / (1 + C ln(r0/r_eff)/(2 pi T))
//
// Where only a measured flow is given, C is that which gives this flow under present pumping: the flow is taken as a sink,
// the head on the circle follows from one solve, C = flow/(head - outlet).
func (m *Model) addSprings(ctx context.Context) error {
	m.SpringC = make([]float64, len(m.Site.Springs))
	measured := false
	for i, s := range m.Site.Springs {
		if s.Conductance != nil {
			m.SpringC[i] = s.Conductance.Best
			m.addSpring(i)
		} else {
			measured = true
		}
	}
	if !measured {
		return m.springProblems()
	}
	if err := m.refactor(ctx); err != nil {
		return err
	}
	var sinks []Sink
	for i, r := range m.Site.Nodes {
		if r.PresentRate != 0 {
			sinks = append(sinks, Sink{m.RequestNode[i], r.PresentRate})
		}
	}
	for i, s := range m.Site.Springs {
		if s.Conductance == nil {
			sinks = append(sinks, Sink{m.SpringNode[i], *s.MeasuredFlow})
		}
	}
	h, err := m.Heads(ctx, sinks)
	if err != nil {
		return err
	}
	bad := &problems{}
	for i, s := range m.Site.Springs {
		if s.Conductance != nil {
			continue
		}
		circle := h[m.SpringNode[i]] - *s.MeasuredFlow*m.SpringRadii[i].Below(s.EffectiveRadius)
		if !(circle > s.OutletLevel) {
			bad.add("spring "+s.Name, s.At, "with its measured flow of %.4g m³/d the modelled head is %.3f m, not above its outlet at %.3f m: check outlet level, recharge and transmissivity, or give a conductance", *s.MeasuredFlow, circle, s.OutletLevel)
			continue
		}
		m.SpringC[i] = *s.MeasuredFlow / (circle - s.OutletLevel)
		m.addSpring(i)
	}
	if err := bad.err(); err != nil {
		return err
	}
	return m.springProblems()
}

// addSpring adds spring i to the features and, where its head is free, to the diagonal.
func (m *Model) addSpring(i int) {
	s := &m.Site.Springs[i]
	effective := m.SpringC[i] / (1 + m.SpringC[i]*m.SpringRadii[i].Below(s.EffectiveRadius))
	m.Exchanges = append(m.Exchanges, Exchange{Name: s.Name, Kind: SpringFeature, Index: i,
		Nodes: []int32{m.SpringNode[i]}, Conductance: []float64{effective}, Level: []float64{s.OutletLevel}, Lowest: []float64{s.OutletLevel}})
	if k := m.free[m.SpringNode[i]]; k >= 0 {
		m.matrix.Values[m.slots.Diagonal[k]] += effective
	}
}

// springProblems refuses springs whose effective radius is too large for the mesh around them: C_eff would not be positive.
func (m *Model) springProblems() error {
	bad := &problems{}
	for _, e := range m.Exchanges {
		if e.Kind != SpringFeature {
			continue
		}
		if c := e.Conductance[0]; !(c > 0) || math.IsInf(c, 0) {
			s := m.Site.Springs[e.Index]
			bad.add("spring "+s.Name, s.At, "its effective radius of %.3g m is too large beside its neighbours for its conductance of %.4g m²/d; give a smaller radius", s.EffectiveRadius, m.SpringC[e.Index])
		}
	}
	return bad.err()
}
