package plan

// daysPerYear turns a yearly volume into a mean rate.
const daysPerYear = 365.25

// quota is a bound on a weighted sum of pumped rates.
type quota struct {
	name    string
	holder  string
	wells   []int
	weight  []float64 // of each of wells: 1; 24/duty hours for an hourly bound; for a yearly one its operating state's part of the year
	basis   string
	entered float64 // as written, per hour, day or year [m³]
	limit   float64 // as a mean rate; hourly: as a running rate [m³/d]
	source  string
	price   float64

	priceRange *PriceRange // nil when not known
}

// readQuotas turns licences and the brief's quotas into one list: licences first, each with its hour, day and year.
func (s *setup) readQuotas(faults *problemList) {
	for _, l := range s.Licences {
		s.addQuota(faults, "licence "+l.ID, quota{name: l.ID, holder: l.Holder, source: l.Source}, l.Wells, l.PerHour, l.PerDay, l.PerYear)
		if len(l.Months) > 0 && len(l.Months) < 12 {
			s.notAssessed.addf("licence %s: its months of use; the plan's rates are steady the year round", l.ID)
		}
	}
	for _, q := range s.Brief.Quotas {
		s.addQuota(faults, "quota "+q.Name, quota{name: q.Name, source: q.Source}, q.Wells, q.PerHour, q.PerDay, q.PerYear)
		if len(q.Months) > 0 && len(q.Months) < 12 {
			s.findings.addf("quota %s is for some months of the year; the one operating state is steady the year round, and so the quota is held all year", q.Name)
		}
	}
}

func (s *setup) addQuota(faults *problemList, what string, base quota, ids []string, hour, day, year *float64) {
	listed := make(map[int]bool, len(ids))
	for _, id := range ids {
		i, known := s.wellIndex[id]
		switch {
		case !known:
			faults.addf("%s: no well %q", what, id)
		case listed[i]:
			faults.addf("%s: well %q is listed twice", what, id)
		default:
			listed[i] = true
			base.wells = append(base.wells, i)
		}
	}
	for _, bound := range []struct {
		value  *float64
		basis  string
		factor float64 // bound in m³/d per unit of the value
	}{{hour, "per hour", 24}, {day, "per day", 1}, {year, "per year", 1 / daysPerYear}} {
		if bound.value == nil {
			continue
		}
		if !finite(*bound.value) || *bound.value < 0 {
			faults.addf("%s: %v m³ %s; it must be a number of at least 0", what, *bound.value, bound.basis)
			continue
		}
		q := base
		q.basis, q.entered, q.limit = bound.basis, *bound.value, *bound.value*bound.factor
		q.weight = make([]float64, len(q.wells))
		for k, i := range q.wells {
			q.weight[k] = 1
			switch bound.basis {
			case "per hour":
				q.weight[k] = s.Wells[i].RunningRate(1)
			case "per year":
				q.weight[k] = s.partOfYear(i)
			}
		}
		s.quotas = append(s.quotas, q)
	}
}

// sum is the quota's weighted sum of the pumped rates [m³/d].
func (q *quota) sum(rates []float64) float64 {
	sum := 0.0
	for k, i := range q.wells {
		if rates[i] > 0 {
			sum += q.weight[k] * rates[i]
		}
	}
	return sum
}

// result is the quota's line in the report.
func (s *setup) quotaResult(q *quota, rates []float64) QuotaResult {
	r := QuotaResult{Name: q.name, Holder: q.holder, Basis: q.basis, Limit: q.limit, Entered: q.entered, Sum: q.sum(rates),
		ShadowPrice: tidy(q.price), Range: q.priceRange, Source: q.source, Wells: make([]string, len(q.wells))}
	for k, i := range q.wells {
		r.Wells[k] = s.Wells[i].ID
	}
	r.Headroom = tidy(r.Limit - r.Sum)
	r.Binds = !(r.Headroom > limitTolerance*q.scale(s))
	return r
}

// scale is what the tolerance on the quota's sum is relative to [m³/d].
func (q *quota) scale(s *setup) float64 {
	scale := q.limit
	for k, i := range q.wells {
		if r := q.weight[k] * s.rateScale(i); q.limit == 0 && r > scale {
			scale = r
		}
	}
	return scale
}
