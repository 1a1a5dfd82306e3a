package plan

import (
	"context"

	"springbound/wells"
)

// receptorResults fills the lines of the receptors and the two tables. Rows of the tables are the receptors that have a response,
// in the order of the receptors.
func (p *planner) receptorResults(ctx context.Context, rates []float64, resolved *lines, report *Report) error {
	s := p.setup
	ids := make([]string, len(s.Wells))
	for i, w := range s.Wells {
		ids[i] = w.ID
	}
	sensitivities := Table{Receptors: []string{}, Units: []string{}, Wells: ids, Values: [][]float64{}}
	contributions := Table{Receptors: []string{}, Units: []string{}, Wells: ids, Values: [][]float64{}}
	for i, rec := range s.Receptors {
		r := describe(rec)
		row := p.oracle.known[0].receptor[i]
		switch {
		case rec.Outside:
			s.notAssessed.addf("receptor %s: it lies outside the model", s.receptorName(rec.ID))
		case row == nil:
			s.notAssessed.addf("receptor %s: the response has no row for it", s.receptorName(rec.ID))
		default:
			tan, err := p.oracle.tangent(ctx, target{receptor: i, well: -1}, rates)
			if err != nil {
				return err
			}
			parts, err := p.fillReceptor(ctx, i, tan, rates, resolved, &r)
			if err != nil {
				return err
			}
			for _, t := range []*Table{&sensitivities, &contributions} {
				t.Receptors = append(t.Receptors, rec.ID)
				t.Units = append(t.Units, r.Unit)
			}
			sensitivities.Values = append(sensitivities.Values, append([]float64(nil), tan.slope...))
			contributions.Values = append(contributions.Values, parts)
		}
		for k, l := range s.Limits {
			if l.Receptor != rec.ID {
				continue
			}
			lr, err := p.limitResult(ctx, k, rates)
			if err != nil {
				return err
			}
			r.Limits = append(r.Limits, lr)
		}
		report.Receptors = append(report.Receptors, r)
	}
	report.Sensitivities, report.Contributions = sensitivities, contributions
	return nil
}

// describe copies what does not depend on rates.
func describe(r wells.Receptor) ReceptorResult {
	words := wordsOfKind[r.Kind]
	out := ReceptorResult{ID: r.ID, Name: r.Name, Kind: r.Kind.String(), Feature: r.Feature, Unit: r.Kind.Unit(), ValueWord: words.value,
		ChangeWord: words.change, Owner: r.Owner, Use: r.Use, Source: r.Source, Date: r.Date, FieldChecked: r.FieldChecked,
		Outside: r.Outside, X: r.At[0], Y: r.At[1], Limits: []LimitResult{}}
	switch {
	case len(r.Area) > 0:
		centre := r.Area.Bound().Center()
		out.X, out.Y = centre[0], centre[1]
	case len(r.Reach) > 0:
		middle := r.Reach[len(r.Reach)/2]
		out.X, out.Y = middle[0], middle[1]
	}
	return out
}

// fillReceptor fills values and changes, and returns the wells' contributions.
func (p *planner) fillReceptor(ctx context.Context, i int, tan tangent, rates []float64, resolved *lines, r *ReceptorResult) ([]float64, error) {
	s := p.setup
	t := target{receptor: i, well: -1}
	row := p.oracle.known[0].receptor[i]
	r.NoPumping, r.Place = tan.base, row.Place
	r.Change = tidy(tan.at(rates))
	r.ChangeResolved = r.Change
	if resolved != nil && resolved.receptor[i] != nil {
		r.ChangeResolved = tidy(resolved.receptor[i].Change)
		r.Place = resolved.receptor[i].Place
	}
	r.Value = r.NoPumping - r.Change
	parts := make([]float64, len(rates))
	for k, w := range s.Wells {
		parts[k] = tidy(tan.slope[k] * rates[k])
		if w.Others {
			r.ChangeOthers += parts[k]
		} else {
			r.ChangeOwn += parts[k]
		}
	}
	for _, known := range []struct {
		get  func(wells.Well) *float64
		name string
		into **float64
	}{{recentRate, "recent", &r.OthersRecent}, {licensedRate, "licensed", &r.OthersLicensed}} {
		others, blank := s.ratesOf(known.get, existingUser)
		if len(blank) > 0 {
			s.notAssessed.addf("the state with existing users at %s rates: that rate of %s is blank", known.name, list(unmarkedNames(blank)))
			continue
		}
		if sameRates(others, make([]float64, len(others))) {
			value := r.NoPumping
			*known.into = &value
			continue
		}
		state, err := p.oracle.tangent(ctx, t, others)
		if err != nil {
			return nil, err
		}
		value := state.base - state.at(others)
		*known.into = &value
	}
	return parts, nil
}

// limitResult fills the line of limit k.
func (p *planner) limitResult(ctx context.Context, k int, rates []float64) (LimitResult, error) {
	s := p.setup
	l := s.Limits[k]
	rec := s.Receptors[s.receptorIndex[l.Receptor]]
	state := l.State
	if state == "" {
		state = s.state
	}
	r := LimitResult{ID: l.ID, Quantity: l.Quantity.String(), Sense: l.Sense.String(), Limit: l.Value, Entered: l.Entered,
		Unit: rec.Kind.Unit(), Baseline: l.Baseline.String(), Counts: l.Counts.String(), Reserve: l.Reserve, State: state,
		Source: l.Source, Date: l.Date, ResultState: p.assessed[k]}
	if l.Quantity == wells.ShareOfBase {
		r.Unit = "1"
	}
	if p.boundOfLimit[k] < 0 {
		r.Sentence = upperFirst(r.ResultState) + "."
		return r, nil
	}
	b := p.bounds[p.boundOfLimit[k]]
	tan, counted, err := p.oracle.tangentOf(ctx, b, rates)
	if err != nil {
		return r, err
	}
	full := tan.at(counted)
	switch l.Quantity {
	case wells.Value:
		r.Value = p.oracle.known[0].row(b.target).Base - full
	default:
		r.Value = tidy((full - b.baseline) / b.unit)
	}
	near := limitTolerance * b.scale(s, tan.slope)
	r.Headroom = tidy(b.headroom(full))
	if b.size > 0 {
		share := r.Headroom * b.unit / b.size
		r.RoomShare = &share
	}
	r.Passed = !(r.Headroom*b.unit >= -near)
	r.Binds = !r.Passed && b.slack(full, p.share) <= near && b.slack(full, 0) >= -near
	r.ShadowPrice, r.Range = tidy(b.price), b.priceRange
	r.ChangeRoom = tidy(b.allowed())
	var byRecharge []string
	if !r.Passed {
		if byRecharge, err = p.heldByRecharge(ctx, b, rates); err != nil {
			return r, err
		}
	}
	row, err := p.oracle.tangent(ctx, b.target, counted)
	if err != nil {
		return r, err
	}
	parts := make([]float64, len(counted))
	for i, q := range counted {
		parts[i] = b.side * row.slope[i] * q
	}
	r.Sentence = p.sentence(b, &r, parts, byRecharge)
	return r, nil
}

// heldByRecharge names the recharging wells without which a limit that holds would be passed, and adds a caution.
func (p *planner) heldByRecharge(ctx context.Context, b *bound, rates []float64) ([]string, error) {
	s := p.setup
	without := restrict(rates, b.counted)
	var names []string
	for i, q := range without {
		if q < 0 && s.inStateOf(b, i) {
			names = append(names, s.Wells[i].ID)
			without[i] = 0
		}
	}
	if len(names) == 0 {
		return nil, nil
	}
	tan, _, err := p.oracle.tangentOf(ctx, b, without)
	if err != nil {
		return nil, err
	}
	if b.side*(b.edge-tan.at(without)) >= -limitTolerance*b.scale(s, tan.slope) {
		return nil, nil
	}
	s.cautions.addf("%s: it holds only because %s %s", upperFirst(s.boundWords(b)), list(names), plural(len(names), "recharges", "recharge"))
	return names, nil
}

func upperFirst(text string) string {
	if text == "" || text[0] < 'a' || text[0] > 'z' {
		return text
	}
	return string(text[0]-'a'+'A') + text[1:]
}
