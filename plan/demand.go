package plan

// demand is a required total of the decided wells' pumped rates, in one operating state where there are several.
type demand struct {
	amount     float64 // [m³/d]
	state      int     // -1: there is one state
	words      string
	mark       string   // names the state; empty where there is one
	price      *float64 // change of the aim per m³/d, nil when nothing was optimised
	priceRange *PriceRange
}

// readDemands lists the demands, one an operating state that has one.
func (s *setup) readDemands() {
	const words = "required total"
	if s.expanded == nil {
		if s.demand != nil {
			s.demands = []demand{{amount: *s.demand, state: -1, words: words}}
		}
		return
	}
	for k, part := range s.expanded.parts {
		if part.demand != nil {
			s.demands = append(s.demands, demand{amount: *part.demand, state: k, words: words + mark(k), mark: mark(k)})
		}
	}
}

// meets tells whether a well's rate counts towards a demand.
func (s *setup) meets(d demand, i int) bool {
	return s.isYield(i) && (d.state < 0 || s.expanded.stateOf(i) == d.state)
}

// totalFor is the total that a demand asks for, as a report shows it [m³/d].
func (s *setup) totalFor(d demand, r *Report) float64 {
	if d.state < 0 {
		return r.TotalRate
	}
	return s.expanded.total(s, ratesIn(r), d.state)
}

func ratesIn(r *Report) []float64 {
	rates := make([]float64, len(r.Wells))
	for i, w := range r.Wells {
		rates[i] = w.Rate
	}
	return rates
}

func (p *planner) setDemandPrice(k int, price float64) {
	d := &p.setup.demands[k]
	d.price = &price
	if d.state < 0 {
		p.demandPrice = &price
	}
}

func (p *planner) setDemandRange(k int, r *PriceRange) {
	d := &p.setup.demands[k]
	d.priceRange = r
	if d.state < 0 {
		p.demandRange = r
	}
}

func (s *setup) dropDemandPrices() {
	for k := range s.demands {
		s.demands[k].price = nil
	}
}

func (s *setup) dropDemandRanges() {
	for k := range s.demands {
		s.demands[k].priceRange = nil
	}
}
