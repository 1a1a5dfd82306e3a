package aquifer

import "math"

// WithRecharge returns the model with every recharge multiplied by a factor, 0 or more. The matrix does not depend on recharge: mesh,
// factorisation and springs' conductances are shared, and only right-hand sides differ. Solves and factorisations made with the result
// are counted on it, from zero. It panics when the factor is negative or not finite.
func (m *Model) WithRecharge(factor float64) *Model {
	if !(factor >= 0 && factor <= math.MaxFloat64) {
		panic("aquifer: WithRecharge: the factor must be finite and at least 0")
	}
	out := *m
	out.Factorisations, out.solves = 0, 0
	out.Inflows = append([]Inflow(nil), m.Inflows...)
	for i := range out.Inflows {
		f := &out.Inflows[i]
		if f.Kind != RechargeFeature {
			continue
		}
		f.Flow = append([]float64(nil), f.Flow...)
		for k := range f.Flow {
			f.Flow[k] *= factor
		}
	}
	out.regions = append([]region(nil), m.regions...)
	for i := range out.regions {
		out.regions[i].recharge *= factor
	}
	return &out
}
