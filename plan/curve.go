package plan

import (
	"context"
	"fmt"
	"math"
	"strings"

	"springbound/plan/convex"
	"springbound/wells"
)

// The schema of curve.json.
const (
	CurveSchemaName    = "springbound/curve"
	CurveSchemaVersion = 1
)

// CurveReport is the aim against the value of one limit.
type CurveReport struct {
	Schema  string `json:"schema"` // "springbound/curve"
	Version int    `json:"version"`
	Title   string `json:"title"`
	Limit   string `json:"limit"` // id of the limit, name of the quota, or 'demand'
	Words   string `json:"words"` // the limit in words
	Unit    string `json:"unit"`  // of the limit's values: m, m3/d, 1; for a quota m3
	Per     string `json:"per"`   // of a quota: per hour, per day, per year
	Aim     string `json:"aim"`
	What    string `json:"what"`     // 'largest total rate', 'smallest headroom'
	AimUnit string `json:"aim_unit"` // of the values: m3/d or 1

	Present float64 `json:"present"` // the limit's value now
	From    float64 `json:"from"`
	To      float64 `json:"to"`
	Exact   bool    `json:"exact"` // the points are the corners of a line of straight pieces; false: plans at chosen values
	Method  string  `json:"method"`

	Points []CurvePoint `json:"points"`
	Before string       `json:"before"` // why there is nothing below the first point; empty: the range ends there
	Beyond string       `json:"beyond"` // why there is nothing above the last point
}

// CurvePoint is one corner or end of a curve, or one plan of a sweep.
type CurvePoint struct {
	At      float64  `json:"limit"`
	Value   *float64 `json:"aim"`           // null: no plan
	Slope   *float64 `json:"slope"`         // per unit of the limit, to the right; at the last corner to the left; of a sweep the price at the point
	Changes string   `json:"what_changes"`  // on passing to larger values: 'W3 stands still; the limit L2 at Fen binds'
	Present bool     `json:"present_limit"` // the point is the present limit
}

// curveSubject is the limit that a curve is about.
type curveSubject struct {
	id      string
	kind    ownerKind
	index   int // into Brief.Limits or quotas
	at      float64
	factor  float64 // programme's unit per unit of the value: of a quota days of its basis
	words   string
	from    float64 // where a range that is not given begins and ends
	to      float64
	way     float64 // +1 where a larger value is looser, -1 where a smaller one is
	withSet func(b *Brief, v float64)
}

// Curve computes the best yield, or the best headroom, as a function of the value of one limit: that of the limit with the given id,
// of a licence or quota by its name (with its basis, as in 'A-17 per year', where it has several), or of the demand ('demand').
// Values are in the limit's unit, those of a quota as entered in m³ per its basis. A nil end stands for zero and for twice the limit; for a
// limit on a value they stand for no room and for twice the room.
//
// Where every row is linear, and the limit moves a right-hand side, the curve is exact: corners from parametric programming
// (convex.ParametricAlong), each piece checked by a solve from nothing. Otherwise it is a sweep: whole plans at sweepValues values.
// The report says which. A *DataError tells that there is no such limit or that the range is empty.
func Curve(ctx context.Context, b Brief, m Model, of string, from, to *float64) (*CurveReport, error) {
	s, err := newSetup(b)
	if err != nil {
		return nil, err
	}
	if err := s.checkAim(); err != nil {
		return nil, err
	}
	if s.Aim != MostYield && s.Aim != MostHeadroom {
		return nil, &DataError{Problems: []string{fmt.Sprintf("a curve is of the aims %s and %s, not of %s", MostYield, MostHeadroom, s.Aim)}}
	}
	p := &planner{setup: s, oracle: &oracle{setup: s, model: m}}
	start, _ := s.startRates()
	if _, err := p.oracle.linearise(ctx, start); err != nil {
		return nil, err
	}
	if err := p.buildBounds(ctx); err != nil {
		return nil, err
	}
	if err := p.checkSizes(); err != nil {
		return nil, err
	}
	c, err := p.subject(of)
	if err != nil {
		return nil, err
	}
	r := &CurveReport{Schema: CurveSchemaName, Version: CurveSchemaVersion, Limit: of, Words: c.words, Unit: "m3/d", Aim: string(s.Aim),
		What: "largest total rate", AimUnit: "m3/d", Present: c.at, From: c.from, To: c.to, Points: []CurvePoint{}}
	switch {
	case c.kind == ofQuota:
		r.Unit, r.Per = "m3", s.quotas[c.index].basis
	case c.kind == ofBound:
		r.Unit = s.Receptors[s.receptorIndex[s.Limits[c.index].Receptor]].Kind.Unit()
		if s.Limits[c.index].Quantity == wells.ShareOfBase {
			r.Unit = "1"
		}
	}
	if s.Aim == MostHeadroom {
		r.What, r.AimUnit = "smallest headroom beyond each reserve", "1"
	}
	if from != nil {
		r.From = *from
	}
	if to != nil {
		r.To = *to
	}
	if !(finite(r.From) && finite(r.To) && r.From < r.To) {
		return nil, &DataError{Problems: []string{fmt.Sprintf("a curve from %v to %v: the first must be below the second", r.From, r.To)}}
	}
	if c.kind != ofBound && r.From < 0 {
		return nil, &DataError{Problems: []string{fmt.Sprintf("a curve from %v: %s cannot be below zero", r.From, c.words)}}
	}
	if p.straight(c, r) {
		return r, p.exactCurve(ctx, c, r)
	}
	return r, sweep(ctx, b, m, c, r)
}

// subject finds the limit that a name means.
func (p *planner) subject(of string) (*curveSubject, error) {
	s := p.setup
	var names []string
	for i, l := range s.Limits {
		names = append(names, l.ID)
		if l.ID == of {
			return p.limitSubject(i)
		}
	}
	var found []int
	for k := range s.quotas {
		name := s.quotas[k].name + " " + s.quotas[k].basis
		names = append(names, name)
		if name == of || s.quotas[k].name == of {
			found = append(found, k)
		}
	}
	if len(found) == 1 {
		return p.quotaSubject(found[0]), nil
	}
	if len(found) > 1 {
		return nil, &DataError{Problems: []string{fmt.Sprintf("%q has several bounds; name one, as in %q", of, of+" "+s.quotas[found[0]].basis)}}
	}
	if s.demand != nil {
		names = append(names, "demand")
	}
	if of == "demand" && s.demand != nil {
		d := *s.demand
		return &curveSubject{kind: ofDemand, at: d, factor: 1, words: "required total", to: 2 * d, way: 1,
			withSet: func(b *Brief, v float64) { b.Demand = &v }}, nil
	}
	return nil, &DataError{Problems: []string{fmt.Sprintf("no limit %q; there is %s", of, list(names))}}
}

func (p *planner) limitSubject(i int) (*curveSubject, error) {
	l := p.setup.Limits[i]
	if p.boundOfLimit[i] < 0 {
		return nil, &DataError{Problems: []string{fmt.Sprintf("limit %s is %s", l.ID, p.assessed[i])}}
	}
	c := &curveSubject{id: l.ID, kind: ofBound, index: i, at: l.Value, factor: 1, words: p.setup.limitWords(l), from: math.Min(0, 2*l.Value), to: math.Max(0, 2*l.Value)}
	b := p.bounds[p.boundOfLimit[i]]
	c.way = b.way()
	if b.value {
		// the room is side·edge in the direction in which the value is looser
		none := l.Value + b.edge // the value without pumping
		far := none - 2*b.edge
		c.from, c.to = math.Min(none, far), math.Max(none, far)
	}
	c.withSet = func(b *Brief, v float64) {
		b.Limits = append([]wells.Limit(nil), b.Limits...)
		b.Limits[i].Value, b.Limits[i].Entered = v, ""
	}
	return c, nil
}

func (p *planner) quotaSubject(k int) *curveSubject {
	q := p.setup.quotas[k]
	c := &curveSubject{kind: ofQuota, index: k, way: 1, at: q.entered, factor: q.factor(), words: p.setup.quotaWords(&q), to: 2 * q.entered}
	c.withSet = func(b *Brief, v float64) { b.setQuota(q.name, q.basis, v) }
	return c
}

// factor is the mean rate, hourly the running rate, of one m³ per the quota's basis [m³/d].
func (q *quota) factor() float64 {
	switch q.basis {
	case "per hour":
		return 24
	case "per year":
		return 1 / daysPerYear
	}
	return 1
}

// setQuota changes one bound of a licence or quota.
func (b *Brief) setQuota(name, basis string, v float64) {
	b.Licences = append([]wells.Licence(nil), b.Licences...)
	for i := range b.Licences {
		l := &b.Licences[i]
		if l.ID != name {
			continue
		}
		switch basis {
		case "per hour":
			l.PerHour = &v
		case "per day":
			l.PerDay = &v
		default:
			l.PerYear = &v
		}
		return
	}
	b.Quotas = append([]Quota(nil), b.Quotas...)
	for i := range b.Quotas {
		if b.Quotas[i].Name != name {
			continue
		}
		if basis == "per day" {
			b.Quotas[i].PerDay = &v
		} else {
			b.Quotas[i].PerYear = &v
		}
	}
}

// straight tells whether the aim is made of straight pieces along the span: linear rows, no choice of which wells run,
// and a limit whose value moves right-hand sides alone.
func (p *planner) straight(c *curveSubject, r *CurveReport) bool {
	if p.setup.switches() {
		return false
	}
	for _, b := range p.bounds {
		if !b.linear {
			return false
		}
	}
	if c.kind != ofBound {
		return true
	}
	b := p.bounds[p.boundOfLimit[c.index]]
	switch {
	case p.setup.Aim == MostHeadroom:
		return false // the limit's size stands beside the share
	case b.reserve == 0:
		return true
	case b.value:
		none := c.at + b.edge
		return !(r.From < none && none < r.To)
	}
	return !(r.From < 0 && 0 < r.To)
}

// exactCurve follows the optimum along the limit.
func (p *planner) exactCurve(ctx context.Context, c *curveSubject, r *CurveReport) error {
	g, err := p.build(true)
	if err != nil {
		return err
	}
	move := convex.Move{Of: convex.SideOf{Index: -1, Side: convex.UpperSide}, Rate: c.factor}
	for i, o := range g.owners {
		switch {
		case o.kind != c.kind:
		case c.kind == ofQuota && o.index == c.index:
			move.Of.Index = i
		case c.kind == ofDemand:
			move.Of = convex.SideOf{Index: i, Side: convex.LowerSide}
			if row := g.problem.Row(i); row.Lower == row.Upper {
				move.Of.Side = convex.BothSides
			}
		case c.kind == ofBound && o.index == p.boundOfLimit[c.index]:
			b := p.bounds[o.index]
			grow := b.grow
			if b.reserve > 0 { // on the side of zero where the span lies
				grow = sign(b.side * (b.edge - b.baseline + b.way()*b.side*b.unit*((r.From+r.To)/2-c.at)))
			}
			move.Of.Index, move.Rate = i, b.way()*b.unit*(1-b.reserve*grow)
			if b.size == 0 && b.reserve == 0 {
				move.Rate = b.way() * b.unit
			}
		}
	}
	r.Exact, r.Method = true, "exact: corners by parametric programming, each piece checked by a solve at its middle; linear response, plans along the curve are not re-solved with the full model"
	curve, err := convex.ParametricAlong(ctx, g.problem, nil, []convex.Move{move}, r.From-c.at, r.To-c.at)
	if ctx.Err() != nil {
		return fmt.Errorf("plan: stopped along a curve: %w", ctx.Err())
	}
	if err != nil {
		return &NumericalError{Status: StatusNumericalFailure, Reason: err.Error()}
	}
	const none = "no rates keep every limit"
	if curve.Status == convex.Infeasible {
		r.Before, r.Beyond = none, none
		return nil
	}
	for k, x := range curve.Points {
		value, slope := tidy(x.Value), tidy(x.Slope)
		point := CurvePoint{At: tidy(c.at + x.At), Value: &value, Slope: &slope, Changes: p.changeWords(g, x, move.Of)}
		if k == len(curve.Points)-1 && !curve.InfeasibleAfter {
			point.At = r.To
		}
		r.Points = append(r.Points, point)
	}
	if curve.InfeasibleBefore {
		r.Before = none
	}
	if curve.InfeasibleAfter {
		r.Beyond = none + "; " + strings.TrimSuffix(p.sideWords(g, curve.Last, true), " binds") + " cannot be kept"
		if curve.Last.Column {
			r.Beyond = none
		}
	}
	r.addPresent()
	return nil
}

// changeWords says what changes at a corner.
func (p *planner) changeWords(g *programme, x convex.Breakpoint, self convex.SideOf) string {
	var parts []string
	say := func(list []convex.SideOf, reached bool) {
		for _, side := range list {
			text := p.sideWords(g, side, reached)
			if !side.Column && side.Index == self.Index && !self.Column {
				text = "the limit itself begins to bind"
				if !reached {
					text = "the limit itself no longer binds"
				}
			}
			parts = append(parts, text)
		}
	}
	say(x.Binds, true)
	say(x.Frees, false)
	return strings.Join(parts, "; ")
}

// addPresent marks the present limit, with a point of its own where it lies on a piece.
func (r *CurveReport) addPresent() {
	for k := range r.Points {
		x := r.Points[k]
		if x.At == r.Present {
			r.Points[k].Present = true
			return
		}
		if k == 0 || !(r.Points[k-1].At < r.Present && r.Present < x.At) {
			continue
		}
		before := r.Points[k-1]
		slope := *before.Slope
		value := *before.Value + slope*(r.Present-before.At)
		r.Points = append(r.Points[:k], append([]CurvePoint{{At: r.Present, Value: &value, Slope: &slope, Present: true}}, r.Points[k:]...)...)
		return
	}
}
