package plan

import (
	"context"
	"errors"
	"fmt"
	"math"
)

// sweepValues is the number of plans of a curve that is not made of straight pieces: every twentieth part of the range.
const sweepValues = 21

// sweep plans at values in equal steps, and at the present limit where none of them is it.
func sweep(ctx context.Context, b Brief, m Model, c *curveSubject, r *CurveReport) error {
	r.Method = fmt.Sprintf("a sweep of %d plans, each solved with the full model: between them nothing is claimed", sweepValues)
	var values []float64
	for k := 0; k < sweepValues; k++ {
		v := r.From + (r.To-r.From)*float64(k)/(sweepValues-1)
		if n := len(values); n > 0 && values[n-1] < c.at && c.at < v {
			values = append(values, c.at)
		}
		values = append(values, v)
	}
	for _, v := range values {
		if err := ctx.Err(); err != nil {
			return fmt.Errorf("plan: stopped along a curve: %w", err)
		}
		x, err := sweepPoint(ctx, b, m, c, v)
		if err != nil {
			return fmt.Errorf("plan: curve at %v: %w", v, err)
		}
		x.Present = v == c.at
		r.Points = append(r.Points, x)
	}
	const none = "no rates keep every limit at these values"
	if r.Points[0].Value == nil {
		r.Before = none
	}
	if r.Points[len(r.Points)-1].Value == nil {
		r.Beyond = none
	}
	return nil
}

// sweepPoint is the plan at one value; what did not settle has no value and says so.
func sweepPoint(ctx context.Context, b Brief, m Model, c *curveSubject, v float64) (CurvePoint, error) {
	c.withSet(&b, v)
	x := CurvePoint{At: tidy(v)}
	r, err := Make(ctx, b, m, Options{})
	var numerical *NumericalError
	var data *DataError
	switch {
	case errors.As(err, &data): // a value that the aim has no meaning for, as a limit of zero for headroom
		x.Changes = joinSentences(data.Problems)
		return x, nil
	case errors.As(err, &numerical):
		x.Changes = numerical.Error()
		return x, nil
	case err != nil:
		return x, err
	case r.Status == StatusInfeasible:
		x.Changes = "no rates keep every limit"
		return x, nil
	case !r.ModelValid:
		x.Changes = "the plan is not valid: " + joinSentences(r.Invalid)
	}
	value := r.best()
	x.Value = &value
	if slope, known := r.slopeAlong(c); known {
		x.Slope = &slope
	}
	return x, nil
}

// best is what the aim makes large: the total, or the smallest share that is free beyond each reserve.
func (r *Report) best() float64 {
	if Aim(r.Aim) != MostHeadroom {
		return r.TotalRate
	}
	least := math.Inf(1)
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.ResultState == "yes" && l.RoomShare != nil {
				least = math.Min(least, *l.RoomShare-l.Reserve)
			}
		}
	}
	for _, w := range r.Wells {
		if room := math.Abs(w.StaticLevel - valueOr(w.LowestLevel, w.StaticLevel)); w.LevelMargin != nil && room > 0 {
			least = math.Min(least, *w.LevelMargin/room)
		}
	}
	return tidy(math.Max(0, least))
}

// slopeAlong is the price of the curve's limit per unit of its value.
func (r *Report) slopeAlong(c *curveSubject) (slope float64, known bool) {
	switch c.kind {
	case ofDemand:
		return valueOr(r.DemandPrice, 0), r.DemandPrice != nil
	case ofQuota:
		return tidy(r.Quotas[c.index].ShadowPrice * c.factor), true
	}
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.ID == c.id {
				return tidy(c.way * l.ShadowPrice), true
			}
		}
	}
	return 0, false
}
