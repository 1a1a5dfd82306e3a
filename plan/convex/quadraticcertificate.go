package convex

import "math"

// slope computes c + Hx by column with the sums of the absolute terms, 1/2 x'Hx and the sum of its absolute terms, for Certify only.
// Entries are visited one by one and added in about 32 digits.
func (p *Problem) slope(x []float64) (slope []twofold, terms []float64, quadratic, size float64) {
	slope, terms = make([]twofold, len(x)), make([]float64, len(x))
	var sum twofold
	if h := p.hessian; h != nil {
		for i := 0; i < h.n; i++ {
			for k := h.start[i]; k < h.start[i+1]; k++ {
				j, v := int(h.column[k]), h.value[k]
				slope[i].addProduct(v, x[j])
				terms[i] += math.Abs(v * x[j])
				if i != j {
					slope[j].addProduct(v, x[i])
					terms[j] += math.Abs(v * x[i])
				}
			}
		}
		for k, f := range h.factor {
			var along twofold
			for j, v := range f {
				along.addProduct(v, x[j])
			}
			g := h.weight[k] * along.value()
			for j, v := range f {
				slope[j].addProduct(g, v)
				terms[j] += math.Abs(g * v)
			}
		}
		for j, v := range x {
			sum.addProduct(slope[j].high/2, v)
			sum.addProduct(slope[j].low/2, v)
			size += math.Abs(terms[j]*v) / 2
		}
	}
	for j := range slope {
		c := p.anyColumn(j).Cost
		slope[j].add(c)
		terms[j] += math.Abs(c)
	}
	return slope, terms, sum.value(), size
}

// flatness returns the largest entry of H d relative to its terms, or, where these are small, to what the largest component of d
// makes of the column's own curvature.
func (p *Problem) flatness(d []float64, scale float64, u yardstick) float64 {
	h := p.hessian
	if h == nil {
		return 0
	}
	cleared := *p
	cleared.columns = append([]Column(nil), p.columns...)
	for j := range cleared.columns {
		cleared.columns[j].Cost = 0
	}
	slope, terms, _, _ := cleared.slope(d)
	own := h.diagonal()
	most := 0.0
	for j := range own {
		size := math.Max(terms[j], math.Abs(own[j])*scale*u.col[j])
		most = largest(most, share(math.Abs(slope[j].value()), size))
	}
	return most
}

// checkCurvature checks that the Hessian bends the wrong way along the direction.
func (c *Certificate) checkCurvature(p *Problem, ray *Ray) {
	if p.hessian == nil || ray == nil || len(ray.Columns) != p.allColumns() {
		c.Reason = "there is no direction of curvature"
		return
	}
	cleared := *p
	cleared.columns = append([]Column(nil), p.columns...)
	for j := range cleared.columns {
		cleared.columns[j].Cost = 0
	}
	_, _, half, size := cleared.slope(ray.Columns)
	c.Curvature = share(half, size)
	wrong := c.Curvature
	if p.sense == Minimise {
		wrong = -wrong
	}
	if !(wrong >= CertifiedCurvature) {
		c.Reason = "the curvature along the direction has the right sign or is rounding"
	}
}
