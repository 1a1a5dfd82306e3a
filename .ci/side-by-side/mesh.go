//go:build ignore

// The project's side of the comparison of mesh generators, and its referee: see the script beside it.
//
//	mesh.go write groups|scattered NODES FILE    write a seeded problem that asks for about so many nodes
//	mesh.go run FILE RUNS                        mesh it so many times; print a line of figures
//	mesh.go geometry FILE OUT                    write it in Gmsh's language
//	mesh.go judge FILE                           print nodes and quality of a Gmsh 2.2 file
package main

import (
	"bufio"
	"context"
	"fmt"
	"log"
	"math"
	"math/rand"
	"os"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

const (
	points = 200 // fixed nodes with a fine mesh around them
	ratio  = 16  // coarsest size over finest
	seed   = 20
	most   = 20_000_000

	// In groups: as well fields are. With 20,000 nodes the size then grows by 0.15 per distance, the most that the project uses.
	groups     = 8
	groupReach = 1200.0 // distance from a point at which the size is the coarsest [m]
	// Scattered evenly: 20,000 nodes leave so few to each point that the size must grow by 0.33 per distance.
	scatterReach = 400.0
	apart        = 60.0 // least distance between points [m]
)

// problem is what all generators mesh.
type problem struct {
	outline orb.Ring
	at      []orb.Point
	finest  float64 // [m]
	reach   float64 // [m]
}

func main() {
	log.SetFlags(0)
	switch {
	case len(os.Args) == 5 && os.Args[1] == "write":
		nodes, err := strconv.Atoi(os.Args[3])
		check(err)
		check(os.WriteFile(os.Args[4], []byte(generate(os.Args[2] == "groups", nodes).text()), 0o644))
	case len(os.Args) == 4 && os.Args[1] == "run":
		runs, err := strconv.Atoi(os.Args[3])
		check(err)
		run(read(os.Args[2]), runs)
	case len(os.Args) == 4 && os.Args[1] == "geometry":
		check(os.WriteFile(os.Args[3], []byte(read(os.Args[2]).geometry()), 0o644))
	case len(os.Args) == 3 && os.Args[1] == "judge":
		judge(os.Args[2])
	default:
		log.Fatal("usage: mesh.go write groups|scattered NODES FILE | run FILE RUNS | geometry FILE OUT | judge FILE")
	}
}

func check(err error) {
	if err != nil {
		log.Fatal(err)
	}
}

// generate makes the problem; the finest size is found from the estimate of the number of nodes.
func generate(grouped bool, nodes int) problem {
	rng := rand.New(rand.NewSource(seed))
	p := problem{reach: scatterReach, outline: orb.Ring{{0, 0}, {10000, 0}, {10300, 4100}, {10000, 8000}, {4800, 8500}, {0, 8000}, {700, 3900}}}
	anywhere := func() orb.Point { return orb.Point{900 + 8900*rng.Float64(), 400 + 7200*rng.Float64()} }
	var centre orb.Point
	for len(p.at) < points {
		q := anywhere()
		if grouped {
			p.reach = groupReach
			if len(p.at)%(points/groups) == 0 {
				centre = q
			}
			q = orb.Point{centre[0] + 250*rng.NormFloat64(), centre[1] + 250*rng.NormFloat64()}
		}
		fits := q[0] > 900 && q[0] < 9800 && q[1] > 200 && q[1] < 7800
		for _, o := range p.at {
			fits = fits && math.Hypot(o[0]-q[0], o[1]-q[1]) > apart
		}
		if fits {
			p.at = append(p.at, q)
		}
	}
	lo, hi := 1e-2, 40.0
	for range 30 {
		p.finest = math.Sqrt(lo * hi)
		if d, o := p.domain(); mesh.EstimateNodes(d, o) > float64(nodes) {
			lo = p.finest
		} else {
			hi = p.finest
		}
	}
	return p
}

// domain is the problem as this project's generator takes it.
func (p problem) domain() (mesh.Domain, mesh.Options) {
	d := mesh.Domain{Outer: p.outline}
	for _, q := range p.at {
		d.Points = append(d.Points, mesh.Point{At: q, Size: p.finest})
	}
	return d, mesh.Options{Coarsest: ratio * p.finest, Growth: (ratio - 1) * p.finest / p.reach, MaxNodes: most}
}

func (p problem) text() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%d %d %v %v %v\n", len(p.outline), len(p.at), p.finest, float64(ratio), p.reach)
	for _, q := range append(slices.Clone(p.outline), p.at...) {
		fmt.Fprintf(&b, "%v %v\n", q[0], q[1])
	}
	return b.String()
}

// geometry is the problem in Gmsh's language; sizes come from the field only.
func (p problem) geometry() string {
	var b strings.Builder
	for i, q := range append(slices.Clone(p.outline), p.at...) {
		fmt.Fprintf(&b, "Point(%d) = {%v, %v, 0};\n", i+1, q[0], q[1])
	}
	n := len(p.outline)
	for i := range n {
		fmt.Fprintf(&b, "Line(%d) = {%d, %d};\n", i+1, i+1, (i+1)%n+1)
	}
	fmt.Fprintf(&b, "Curve Loop(1) = {1:%d};\nPlane Surface(1) = {1};\nPoint{%d:%d} In Surface{1};\n", n, n+1, n+len(p.at))
	fmt.Fprintf(&b, "Field[1] = Distance;\nField[1].PointsList = {%d:%d};\nField[2] = Threshold;\nField[2].InField = 1;\n", n+1, n+len(p.at))
	fmt.Fprintf(&b, "Field[2].SizeMin = %v;\nField[2].SizeMax = %v;\nField[2].DistMin = 0;\nField[2].DistMax = %v;\n", p.finest, ratio*p.finest, p.reach)
	b.WriteString("Background Field = 2;\nMesh.MeshSizeFromPoints = 0;\nMesh.MeshSizeExtendFromBoundary = 0;\nMesh.SaveAll = 1;\n")
	return b.String()
}

// read takes a problem from a file.
func read(file string) problem {
	raw, err := os.ReadFile(file)
	check(err)
	f := strings.Fields(string(raw))
	number := func(i int) float64 {
		x, err := strconv.ParseFloat(f[i], 64)
		check(err)
		return x
	}
	p := problem{finest: number(2), reach: number(4)}
	n, m := int(number(0)), int(number(1))
	for i := range n + m {
		q := orb.Point{number(5 + 2*i), number(6 + 2*i)}
		if i < n {
			p.outline = append(p.outline, q)
		} else {
			p.at = append(p.at, q)
		}
	}
	return p
}

// run meshes the problem; every run is the whole call.
func run(p problem, runs int) {
	d, o := p.domain()
	var seconds, busy []float64
	var m *mesh.Mesh
	for range runs {
		m = nil
		runtime.GC()
		begin, before := time.Now(), processorTime()
		var err error
		m, err = mesh.Build(context.Background(), d, o)
		seconds, busy = append(seconds, time.Since(begin).Seconds()), append(busy, processorTime()-before)
		check(err)
	}
	slices.Sort(seconds)
	slices.Sort(busy)
	report(m.X, m.Y, m.Triangles, seconds[len(seconds)/2], busy[len(busy)/2])
}

// processorTime is what this process has used of all processors [s].
func processorTime() float64 {
	var u syscall.Rusage
	check(syscall.Getrusage(syscall.RUSAGE_SELF, &u))
	return float64(u.Utime.Sec+u.Stime.Sec) + 1e-6*float64(u.Utime.Usec+u.Stime.Usec)
}

// report prints nodes, seconds, seconds of all processors, smallest angle in degrees, per cent of obtuse triangles and peak memory in MB.
func report(x, y []float64, triangles []int32, seconds, busy float64) {
	least, obtuse := math.Inf(1), 0
	for t := 0; t < len(triangles); t += 3 {
		wide := false
		for k := range 3 {
			a, b, c := triangles[t+k], triangles[t+(k+1)%3], triangles[t+(k+2)%3]
			ux, uy, vx, vy := x[b]-x[a], y[b]-y[a], x[c]-x[a], y[c]-y[a]
			dot := ux*vx + uy*vy
			least = min(least, math.Abs(math.Atan2(ux*vy-uy*vx, dot)))
			wide = wide || dot < -1e-9*math.Hypot(ux, uy)*math.Hypot(vx, vy) // rounding of a right angle
		}
		if wide {
			obtuse++
		}
	}
	fmt.Printf("%d %.4f %.4f %.2f %.3f %d\n", len(x), seconds, busy, least*180/math.Pi, 300*float64(obtuse)/float64(len(triangles)), peak())
}

// peak is the most memory that this process has held [MB].
func peak() int {
	raw, _ := os.ReadFile("/proc/self/status")
	for _, l := range strings.Split(string(raw), "\n") {
		if f := strings.Fields(l); len(f) > 1 && f[0] == "VmHWM:" {
			kb, _ := strconv.Atoi(f[1])
			return kb / 1024
		}
	}
	return 0
}

// judge reads a Gmsh 2.2 file and reports it; its memory is that of this reader and means nothing.
func judge(file string) {
	f, err := os.Open(file)
	check(err)
	defer f.Close()
	in := bufio.NewScanner(f)
	var x, y []float64
	var triangles []int32
	number := map[string]int32{}
	part := ""
	for in.Scan() {
		w := strings.Fields(in.Text())
		switch {
		case len(w) > 0 && strings.HasPrefix(w[0], "$"):
			part = w[0]
		case part == "$Nodes" && len(w) == 4:
			u, err := strconv.ParseFloat(w[1], 64)
			check(err)
			v, err := strconv.ParseFloat(w[2], 64)
			check(err)
			number[w[0]] = int32(len(x))
			x, y = append(x, u), append(y, v)
		case part == "$Elements" && len(w) > 3 && w[1] == "2":
			for _, v := range w[len(w)-3:] {
				triangles = append(triangles, number[v])
			}
		}
	}
	check(in.Err())
	report(x, y, triangles, 0, 0)
}
