package adjoint_test

import (
	"context"
	"testing"

	"springbound/adjoint"
	"springbound/aquifer"
)

// Sensitivities with whole fields and those from the wells' entries alone are the same to the last bit.
func TestSelectedSensitivitiesEqualWholeFields(t *testing.T) {
	ctx := context.Background()
	site, ws, rs := everything(motions(1)[0], 0)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 3000})
	fields := 0
	whole, err := f.Sensitivities(ctx, nil, adjoint.Options{Capture: true, Field: func(int, []float64) error { fields++; return nil }})
	if err != nil {
		t.Fatal(err)
	}
	alone, err := f.Sensitivities(ctx, nil, adjoint.Options{Capture: true})
	if err != nil {
		t.Fatal(err)
	}
	if fields == 0 || len(whole.Rows) != len(alone.Rows) || len(whole.Capture) != len(alone.Capture) {
		t.Fatalf("%d fields, %d and %d rows, %d and %d captures", fields, len(whole.Rows), len(alone.Rows), len(whole.Capture), len(alone.Capture))
	}
	for i, r := range whole.Rows {
		for w, v := range r.Slope {
			if got := alone.Rows[i].Slope[w]; got != v {
				t.Errorf("row %d well %d: %v alone, %v with the whole field", i, w, got, v)
			}
		}
	}
	for i, c := range whole.Capture {
		for w, v := range c.Share {
			if got := alone.Capture[i].Share[w]; got != v {
				t.Errorf("capture by %s of well %d: %v alone, %v with the whole field", c.Feature.Name, w, got, v)
			}
		}
	}
}
