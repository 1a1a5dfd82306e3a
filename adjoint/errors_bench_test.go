package adjoint_test

import (
	"context"
	"fmt"
	"testing"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/wells"
)

// manyReceptors is BM4 with 40 points and 40 wells on about so many nodes.
func manyReceptors(b *testing.B, nodes int) (*adjoint.Field, *adjoint.State) {
	m := motions(2)[1]
	site := benchmarks()[3].site(m)
	var ws []wells.Well
	var rs []wells.Receptor
	for i := range 40 {
		x, y := 200+float64(i%8)*370, 200+float64(i/8)*390
		ws = append(ws, pumped(fmt.Sprintf("W%d", i+1), m.at(x, y), 0.2, 100))
		rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", i+1), Kind: wells.PointLevel, At: m.at(x+130, y+90)})
	}
	f := build(b, site, ws, rs, aquifer.Options{Nodes: nodes})
	s, err := f.Changes(context.Background(), ratesOf(ws))
	if err != nil {
		b.Fatal(err)
	}
	return f, s
}

// What estimates cost beside the model and the adjoint solves of 40 receptors.
func BenchmarkErrors(b *testing.B) {
	ctx := context.Background()
	for _, nodes := range []int{20000, 100000} {
		f, s := manyReceptors(b, nodes)
		for _, c := range []struct {
			name string
			do   func() error
		}{
			{"model", func() error { _, err := aquifer.Build(ctx, f.Model.Site, aquifer.Options{Nodes: nodes}); return err }},
			{"sensitivities", func() error { _, err := f.Sensitivities(ctx, s, adjoint.Options{}); return err }},
			{"changes' errors", func() error { _, err := f.Errors(ctx, s, adjoint.ErrorOptions{ChangesOnly: true}); return err }},
			{"all errors", func() error { _, err := f.Errors(ctx, s, adjoint.ErrorOptions{}); return err }},
			{"all errors with bounds of slopes", func() error { _, err := f.Errors(ctx, s, adjoint.ErrorOptions{SlopeBounds: true}); return err }},
		} {
			b.Run(fmt.Sprintf("%d/%s", len(f.Model.Mesh.X), c.name), func(b *testing.B) {
				for b.Loop() {
					if err := c.do(); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
