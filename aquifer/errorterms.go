package aquifer

// ErrorTerms splits the difference between the finer and the coarse model's value of a quantity over places. With s the drawdowns and z the
// influence of the quantity, c the coarse and f the finer mesh's, P linear interpolation, A the matrices,
//
//	J_f - J_c = a_f(s_f - P s_c, z_f - P z_c) - (a_f(P s_c, P z_c) - a_c(s_c, z_c)) + rest
//
// the first part is the dual-weighted residual (Becker & Rannacher 2001), each error weighted by the other, and the second what lumping
// the exchange at nodes adds; both are sums over triangles and line edges. The rest, which the caller knows from the values themselves, is what the
// quantity's own weights and direct terms add.
type ErrorTerms struct {
	Triangle []float64 // per coarse triangle
	Node     []float64 // per coarse node: exchange along lines and at points
}

// exchangeAt holds conductances by node: over areas as a share that answers, along lines and at points as conductances.
type exchangeAt struct {
	area  []float64 // share of the area's exchange that answers [-]
	point []float64 // [m²/d]
}

// exchanges sums the conductances that answer in a state.
func (m *Model) exchanges(off []SwitchedOff) exchangeAt {
	n := len(m.Mesh.X)
	x := exchangeAt{make([]float64, n), make([]float64, n)}
	total := make([]float64, n)
	next := 0
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		areal := e.Kind == LeakageFeature || e.Kind == LakeFeature
		for k, node := range e.Nodes {
			acts := true
			if next < len(off) && off[next] == (SwitchedOff{i, k}) {
				next++
				acts = false
			}
			if areal {
				total[node] += e.Conductance[k]
			}
			switch {
			case acts && areal:
				x.area[node] += e.Conductance[k]
			case acts:
				x.point[node] += e.Conductance[k]
			}
		}
	}
	for i, t := range total {
		if t > 0 {
			x.area[i] /= t
		}
	}
	return x
}

// exchangePerArea is the conductance per area of leakage and lakes in a triangle [1/d].
func (m *Model) exchangePerArea(t int) float64 {
	r := &m.regions[m.Mesh.Region[t]]
	k := r.leak
	for _, l := range r.lakes {
		k += 1 / m.Site.Lakes[l].BedResistance.Best
	}
	return k
}

// Difference is a field over the finer nodes less the linear interpolant of the coarse one.
func (f *Finer) Difference(coarse, fine []float64) []float64 {
	d := f.Prolong(coarse)
	for i, v := range fine {
		d[i] = v - d[i]
	}
	return d
}

// Terms computes the terms for drawdowns s and influence z on the coarse (c) mesh and their differences (ds, dz) on the finer one.
func (f *Finer) Terms(sys *FineSystem, sc, zc, ds, dz []float64) ErrorTerms {
	out := ErrorTerms{make([]float64, len(f.Coarse.Mesh.Region)), make([]float64, len(f.Coarse.Mesh.X))}
	c := f.Coarse
	for t := range out.Triangle {
		sum := 0.0
		for q := 4 * t; q < 4*t+4; q++ {
			sum += f.product(q, ds, dz)
		}
		if k := c.exchangePerArea(t); k > 0 {
			sum += k * f.areaTerm(sys, t, sc, zc, ds, dz)
		}
		out.Triangle[t] = sum
	}
	f.pointTerms(sys, sc, zc, ds, dz, out.Node)
	return out
}

// Energy is the integral of T grad d . grad d over coarse triangles for a field over the finer nodes.
func (f *Finer) Energy(triangles []int32, d []float64) float64 {
	sum := 0.0
	for _, t := range triangles {
		for q := 4 * int(t); q < 4*int(t)+4; q++ {
			sum += f.product(q, d, d)
		}
	}
	return sum
}

// areaTerm is what exchange over the area adds in a coarse triangle, per conductance and area. With thirds of a triangle's area lumped at its
// nodes the lumped products of two linear functions differ between the meshes by area/16 times the products of their differences over
// the three edges. That volumes are bounded by perpendicular bisectors instead shifts parts between neighbours; the sum of these shifts is in the rest.
func (f *Finer) areaTerm(sys *FineSystem, t int, sc, zc, ds, dz []float64) float64 {
	nodes, inner := f.Coarse.Mesh.Triangles[3*t:3*t+3], f.Mesh.Triangles[3*(4*t+3):3*(4*t+3)+3]
	area, share := 0.0, 0.0
	for i, n := range nodes {
		area += f.Coarse.area[3*t+i]
		share += sys.coarseExchange.area[n] / 3
	}
	sum := 0.0
	for i, n := range nodes {
		m := nodes[(i+1)%3]
		sum += area * (share*(sc[n]-sc[m])*(zc[n]-zc[m])/16 + share*ds[n]*dz[n]/12)
	}
	for _, n := range inner {
		sum += area * share * ds[n] * dz[n] / 4
	}
	return sum
}

// product is the integral of T grad u . grad v over triangle q of the finer mesh.
func (f *Finer) product(q int, u, v []float64) float64 {
	a, b, c := f.Mesh.Triangles[3*q], f.Mesh.Triangles[3*q+1], f.Mesh.Triangles[3*q+2]
	k := f.conductance[3*q : 3*q+3]
	return k[0]*(u[b]-u[c])*(v[b]-v[c]) + k[1]*(u[c]-u[a])*(v[c]-v[a]) + k[2]*(u[a]-u[b])*(v[a]-v[b])
}

// pointTerms adds the terms of exchange along lines and at points. On a line edge of conductance 4 C, C of it lumped in the middle, the
// lumped products of two linear functions differ between the meshes by C times the product of their differences over the edge.
func (f *Finer) pointTerms(sys *FineSystem, sc, zc, ds, dz, out []float64) {
	fine, left := sys.fineExchange.point, append([]float64(nil), sys.coarseExchange.point...)
	n := len(out)
	for k, e := range f.ends {
		m := n + k
		if fine[m] == 0 {
			continue
		}
		a, b := e[0], e[1]
		term := fine[m] * (ds[m]*dz[m] + (sc[a]-sc[b])*(zc[a]-zc[b])/4)
		out[a] += term / 2
		out[b] += term / 2
		left[a] -= fine[m] / 2
		left[b] -= fine[m] / 2
	}
	for i := range out {
		if fine[i] != 0 || left[i] != 0 {
			out[i] += fine[i]*ds[i]*dz[i] + (left[i]-fine[i])*sc[i]*zc[i]
		}
	}
}

// State makes a state of the finer model of heads at its nodes and the entries switched off.
func (f *Finer) State(heads []float64, off []SwitchedOff) *Settled {
	return &Settled{Heads: heads, Off: off, model: f.Model}
}

// OffAt lists the entries of the finer model's exchanges whose head is below their lowest.
func (f *Finer) OffAt(heads []float64) []SwitchedOff { return f.offAt(heads) }

// Pumped is the right-hand side over the unknowns whose solution is the drawdown that the sinks cause between two states, base and state,
// with the heads of the base: an entry that has switched off on the way has taken away the support that it gave.
func (f *Finer) Pumped(sinks []Sink, base, state *Settled) []float64 {
	b := make([]float64, len(f.nodeOf))
	for _, s := range sinks {
		if i := f.free[s.Node]; i >= 0 {
			b[i] += s.Rate
		}
	}
	lost := func(off, notIn []SwitchedOff, sign float64) {
		in := map[SwitchedOff]bool{}
		for _, o := range notIn {
			in[o] = true
		}
		for _, o := range off {
			if e := &f.Exchanges[o.Exchange]; !in[o] {
				n := e.Nodes[o.Entry]
				b[f.free[n]] += sign * e.Conductance[o.Entry] * (base.Heads[n] - e.Lowest[o.Entry])
			}
		}
	}
	lost(state.Off, base.Off, -1)
	lost(base.Off, state.Off, 1)
	return b
}

// Unpumped is the right-hand side over the unknowns without sinks in a state.
func (f *Finer) Unpumped(off []SwitchedOff) []float64 { return f.switchedSide(nil, off) }

// Whole puts prescribed heads to a field over the unknowns.
func (f *Finer) Whole(unknowns []float64) []float64 { return f.spread(unknowns) }

// PatchNodes lists the nodes around a node within which its discrete logarithm is compared with the exact one.
func (m *Model) PatchNodes(node int32) []int32 {
	inside, _ := m.patch(node, m.around(node))
	return inside
}

// Shares gives the nodes of a prescribed-head edge the part of their flow that is its own.
func (e *HeadEdge) Shares() []float64 { return e.own }
