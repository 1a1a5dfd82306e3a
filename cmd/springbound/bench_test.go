package main

import (
	"bytes"
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"springbound/adjoint"
	"springbound/plan"
	"springbound/plan/workbook"
)

// standardJob generates a site of 24 x 16 km with three zones, a river, a coast, and as many wells and receptors as asked for.
func standardJob(wellCount, receptorCount, nodes int) draft {
	rng := rand.New(rand.NewPCG(300, 40))
	m := turn{cos: 1, dx: 400000, dy: 4000000}
	var taken [][2]float64
	place := func(apart float64) [2]float64 {
		for {
			p := [2]float64{600 + 22800*rng.Float64(), 600 + 14800*rng.Float64()}
			ok := math.Abs(p[1]-8000-600*math.Sin(p[0]/3000)) > 150
			for _, q := range taken {
				ok = ok && math.Hypot(p[0]-q[0], p[1]-q[1]) > apart
			}
			if ok {
				taken = append(taken, p)
				return m.at(p[0], p[1])
			}
		}
	}
	d := draft{crs: "EPSG:32630", layers: map[string][]feature{}, tables: map[string]string{}}
	var coast [][2]float64
	for y := 16000.0; y >= 0; y -= 500 {
		coast = append(coast, m.at(150*math.Sin(y/900), y))
	}
	ring := append([][2]float64{}, coast...)
	ring = append(ring, m.at(24000, 0), m.at(24300, 8000), m.at(24000, 16000))
	d.layers["extent"] = []feature{{map[string]any{}, "Polygon", polygon(ring)}}
	d.layers["edges"] = []feature{{map[string]any{"name": "coast", "kind": "prescribed_head", "level_m": 1}, "LineString", lineString(coast...)}}
	var river [][2]float64
	var levels []float64
	for x := 23000.0; x >= 1000; x -= 500 {
		river = append(river, m.at(x, 8000+600*math.Sin(x/3000)))
		levels = append(levels, 1.5+x/1000)
	}
	d.layers["rivers"] = []feature{{map[string]any{"name": "Main", "water_levels_m": levels, "width_m": 10, "bed_resistance_d": 5}, "LineString", lineString(river...)}}
	zone := func(name string, t float64, p ...[2]float64) feature {
		for i := range p {
			p[i] = m.at(p[i][0], p[i][1])
		}
		return feature{map[string]any{"name": name, "transmissivity_m2_per_d": t}, "Polygon", polygon(p)}
	}
	d.layers["zones"] = []feature{zone("north", 400, [2]float64{-500, 10000}, [2]float64{25000, 11000}, [2]float64{25000, 17000}, [2]float64{-500, 17000}),
		zone("gravel", 2500, [2]float64{4000, 6500}, [2]float64{20000, 6800}, [2]float64{19500, 9700}, [2]float64{4500, 9600})}
	for i := range wellCount {
		d.layers["wells"] = append(d.layers["wells"], feature{map[string]any{"id": fmt.Sprintf("W%d", i+1), "radius_m": 0.2, "max_m3_per_d": 400 + float64(rng.IntN(12))*100, "present_m3_per_d": 100, "requested_m3_per_d": 700}, "Point", place(250)})
	}
	limits := []string{"id,receptor,quantity,sense,value,unit,source"}
	for i := range receptorCount {
		id := fmt.Sprintf("P%d", i+1)
		d.layers["receptors"] = append(d.layers["receptors"], feature{map[string]any{"id": id, "kind": "point"}, "Point", place(200)})
		limits = append(limits, fmt.Sprintf("L%d,%s,change,at_most,%.2f,m,invented", i+1, id, 0.5+2*rng.Float64()))
	}
	d.tables["limits"] = strings.Join(limits, "\n") + "\n"
	d.toml = fmt.Sprintf("title = \"Standard job\"\n[coordinates]\nworking = \"EPSG:32630\"\nvertical_datum = \"local\"\n[aquifer]\ntransmissivity = \"900 m2/d\"\nrecharge = \"0.6 mm/d\"\n[mesh]\nnodes = %d\n[brief]\naim = \"most-yield\"\n", nodes)
	return d
}

// BenchmarkStandardJob runs the whole chain of 300 wells, 40 receptors and 100,000 nodes, and reports each stage's share in milliseconds.
func BenchmarkStandardJob(b *testing.B) {
	for _, size := range []struct{ wells, receptors, nodes int }{{30, 40, 20000}, {300, 40, 100000}} {
		b.Run(fmt.Sprintf("wells=%d/receptors=%d/nodes=%d", size.wells, size.receptors, size.nodes), func(b *testing.B) {
			dir := standardJob(size.wells, size.receptors, size.nodes).write(b)
			stage := map[string]time.Duration{}
			b.ResetTimer()
			for range b.N {
				timeStages(b, dir, stage)
			}
			for _, name := range []string{"read+model", "linearise", "plan", "complete", "maps", "json", "workbook"} {
				b.ReportMetric(float64(stage[name].Milliseconds())/float64(b.N), name+"-ms")
			}
		})
	}
}

func timeStages(b *testing.B, dir string, stage map[string]time.Duration) {
	ctx := context.Background()
	last := time.Now()
	mark := func(name string) {
		stage[name] += time.Since(last)
		last = time.Now()
	}
	must := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	var sink bytes.Buffer
	j, err := newJob(ctx, solving{common: common{Project: dir, Quiet: true}}, streams{out: &sink, err: &sink})
	must(err)
	mark("read+model")
	_, err = j.Linearise(ctx, make([]float64, len(j.field.Wells)))
	must(err)
	mark("linearise")
	r, err := j.makePlan(ctx)
	must(err)
	mark("plan")
	state, err := j.complete(ctx, r)
	must(err)
	mark("complete")
	m := newMaps(j)
	must(m.heads(state))
	mark("maps")
	_, err = plan.Marshal(r)
	must(err)
	mark("json")
	_, err = workbook.Write(r)
	must(err)
	mark("workbook")
}

// BenchmarkWells shows that the cost of sensitivities does not grow with the number of wells beyond reading their entries where influence fields are
// made, and is below that where they are not: the same mesh serves 30 and 3,000 wells.
func BenchmarkWells(b *testing.B) {
	ctx := context.Background()
	var sink bytes.Buffer
	dir := standardJob(300, 40, 100000).write(b)
	j, err := newJob(ctx, solving{common: common{Project: dir, Quiet: true}}, streams{out: &sink, err: &sink})
	if err != nil {
		b.Fatal(err)
	}
	fs := j.field.FixedFunctionals()
	for _, count := range []int{30, 3000} {
		wanted := make([]int32, count)
		for i := range wanted {
			wanted[i] = int32(i * (len(j.field.Model.Mesh.X) / count))
		}
		for _, fields := range []bool{false, true} {
			var each func(int, []float64) error
			if fields {
				each = func(int, []float64) error { return nil }
			}
			b.Run(fmt.Sprintf("fields=%t/wells=%d", fields, count), func(b *testing.B) {
				for range b.N {
					if _, err := adjoint.Solve(ctx, j.field.Model, j.field.Model, fs, wanted, each, nil); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*len(fs)), "ns/receptor")
			})
		}
	}
}

// TestWriteStandardJob lays the standard job into the folder named by SPRINGBOUND_JOB_DIR, for timing the whole program from outside.
func TestWriteStandardJob(t *testing.T) {
	to := os.Getenv("SPRINGBOUND_JOB_DIR")
	if to == "" {
		t.Skip("SPRINGBOUND_JOB_DIR names no folder")
	}
	from := standardJob(300, 40, 100000).write(t)
	entries, err := os.ReadDir(from)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(to, 0o755); err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		data, err := os.ReadFile(filepath.Join(from, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		save(t, to, e.Name(), data)
	}
}
