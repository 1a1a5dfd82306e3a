package aquifer

// InwardStretches locates, along each prescribed-head edge, every stretch where flow runs into the aquifer under heads h, one entry a run of
// neighbouring nodes; runs whose flow is rounding beside the edge's largest are left out.
func (m *Model) InwardStretches(h []float64) []Turned {
	var out []Turned
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		q := m.edgeFlows(e, h)
		largest := 0.0
		for _, v := range q {
			largest = max(largest, v, -v)
		}
		var run *Turned
		worst := 0.0
		for k, v := range q {
			if !(v > inwardRounding*largest) {
				run = nil
				continue
			}
			if run == nil {
				out = append(out, Turned{Edge: e.Name, Index: e.Index, Saline: m.Site.Edges[e.Index].Saline})
				run, worst = &out[len(out)-1], 0
			}
			run.Inflow += v
			if k > 0 {
				run.Length += distance(m.At(e.Nodes[k-1]), m.At(e.Nodes[k])) / 2
			}
			if k+1 < len(q) {
				run.Length += distance(m.At(e.Nodes[k]), m.At(e.Nodes[k+1])) / 2
			}
			if v > worst {
				worst, run.At = v, m.At(e.Nodes[k])
			}
		}
	}
	return out
}

// inwardRounding is the share of an edge's largest nodal flow below which a flow is what a direct solve leaves.
const inwardRounding = 1e-9
