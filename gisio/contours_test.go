package gisio

import (
	"bytes"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/paulmach/orb"
)

// gridMesh gives a triangulated grid of n x n cells on the square from -1 to 1, its inner nodes moved about by a share
// of a cell, diagonals alternating.
func gridMesh(n int, shake float64, seed uint64) (x, y []float64, triangles []int32) {
	random := rand.New(rand.NewPCG(seed, 7))
	h := 2 / float64(n)
	for j := range n + 1 {
		for i := range n + 1 {
			px, py := -1+h*float64(i), -1+h*float64(j)
			if i > 0 && i < n && j > 0 && j < n {
				px += h * shake * (random.Float64() - 0.5)
				py += h * shake * (random.Float64() - 0.5)
			}
			x, y = append(x, px), append(y, py)
		}
	}
	for j := range n {
		for i := range n {
			a := int32(j*(n+1) + i)
			b, c, d := a+1, a+int32(n)+2, a+int32(n)+1
			if (i+j)%2 == 0 {
				triangles = append(triangles, a, b, c, a, c, d)
			} else {
				triangles = append(triangles, a, b, d, b, c, d)
			}
		}
	}
	return x, y, triangles
}

func field(x, y []float64, f func(x, y float64) float64) []float64 {
	out := make([]float64, len(x))
	for i := range x {
		out[i] = f(x[i], y[i])
	}
	return out
}

func mustContours(t testing.TB, x, y []float64, triangles []int32, values, levels []float64) []Contour {
	t.Helper()
	out, err := Contours(x, y, triangles, values, levels)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func onSquare(p orb.Point) bool {
	return math.Max(math.Abs(p[0]), math.Abs(p[1])) >= 1-1e-12 // rounding of an interpolation between numbers of size 1
}

func length(l orb.LineString) float64 {
	sum := 0.0
	for i := 1; i < len(l); i++ {
		sum += math.Hypot(l[i][0]-l[i-1][0], l[i][1]-l[i-1][1])
	}
	return sum
}

// The contour of a plane is one straight line from outline to outline, whatever the mesh.
func TestContourOfPlane(t *testing.T) {
	x, y, triangles := gridMesh(17, 0.8, 3)
	values := field(x, y, func(x, y float64) float64 { return 2*x + 3*y + 1 })
	for _, c := range mustContours(t, x, y, triangles, values, []float64{0.3, 1, 2.2}) {
		if len(c.Lines) != 1 || c.Lines[0].Closed {
			t.Fatalf("level %v: %d lines", c.Level, len(c.Lines))
		}
		points := c.Lines[0].Points
		for _, p := range points {
			if d := math.Abs(2*p[0] + 3*p[1] + 1 - c.Level); d > 1e-14*10 { // some ten roundings of numbers up to 6
				t.Errorf("level %v: point %v is off by %g", c.Level, p, d)
			}
		}
		first, last := points[0], points[len(points)-1]
		if !onSquare(first) || !onSquare(last) {
			t.Errorf("ends %v and %v are not on the outline", first, last)
		}
		if d := math.Hypot(last[0]-first[0], last[1]-first[1]); math.Abs(length(points)-d) > 1e-13 {
			t.Errorf("length %v, straight %v", length(points), d)
		}
		// Higher values lie on the left: the gradient (2, 3) turned by a right angle clockwise is the direction.
		if dx, dy := last[0]-first[0], last[1]-first[1]; !(3*dx-2*dy > 0) {
			t.Errorf("direction (%v, %v) has the higher values on its right", dx, dy)
		}
	}
}

// A circle: one loop, counterclockwise around the higher values, its length tending to 2πr with the square of the
// cell size (chords of a smooth curve).
func TestContourOfCircle(t *testing.T) {
	const r = 0.61
	var errs []float64
	for _, n := range []int{20, 40, 80, 160} {
		x, y, triangles := gridMesh(n, 0, 1)
		values := field(x, y, func(x, y float64) float64 { return -math.Hypot(x, y) })
		c := mustContours(t, x, y, triangles, values, []float64{-r})
		if len(c[0].Lines) != 1 || !c[0].Lines[0].Closed {
			t.Fatalf("n = %d: %+v", n, c)
		}
		points := c[0].Lines[0].Points
		if points[0] != points[len(points)-1] {
			t.Fatal("a closed line does not repeat its first point")
		}
		if !(ringArea(points) > 0) {
			t.Error("the higher values lie on the right")
		}
		errs = append(errs, math.Abs(length(points)-2*math.Pi*r))
	}
	for i := 1; i < len(errs); i++ {
		// Halving the cells quarters the error; 2.5 leaves room for where the nodes happen to fall.
		if !(errs[i] < errs[i-1]/2.5) {
			t.Errorf("errors %v do not fall with the square of the cell size", errs)
		}
	}
	if !(errs[3] < 1e-4) {
		t.Errorf("error at the finest grid %v", errs[3])
	}
}

// checkContours holds what is true of any contours: open lines end on the outline, closed ones are loops, no line has
// repeated points, no stretch is drawn twice, and loops plus lines account for the pieces into which they cut the
// square (Euler): each line or loop adds one.
func checkContours(t *testing.T, x, y []float64, triangles []int32, values []float64, c Contour) {
	t.Helper()
	stretches := make(map[directed]bool)
	for _, l := range c.Lines {
		n := len(l.Points)
		if n < 2 || l.Closed != (l.Points[0] == l.Points[n-1]) {
			t.Fatalf("level %v: closed %v, points %v", c.Level, l.Closed, l.Points)
		}
		if !l.Closed && (!onSquare(l.Points[0]) || !onSquare(l.Points[n-1])) {
			t.Fatalf("level %v: a line ends inside, at %v or %v", c.Level, l.Points[0], l.Points[n-1])
		}
		for i := 1; i < n; i++ {
			d := directed{l.Points[i-1], l.Points[i]}
			if d.from == d.to {
				t.Fatalf("level %v: repeated point %v", c.Level, d.from)
			}
			if stretches[d] {
				t.Fatalf("level %v: %v drawn twice", c.Level, d)
			}
			stretches[d] = true
		}
	}
	if above, below := regions(len(x), triangles, values, c.Level); above+below != len(c.Lines)+1 && !slices.Contains(values, c.Level) {
		t.Fatalf("level %v: %d lines, but %d pieces above and %d below", c.Level, len(c.Lines), above, below)
	}
}

// regions counts the connected sets of nodes above and below a level.
func regions(n int, triangles []int32, values []float64, level float64) (above, below int) {
	parent := make([]int, n)
	for i := range parent {
		parent[i] = i
	}
	var root func(i int) int
	root = func(i int) int {
		if parent[i] != i {
			parent[i] = root(parent[i])
		}
		return parent[i]
	}
	for k := 0; k < len(triangles); k += 3 {
		for i := range 3 {
			a, b := int(triangles[k+i]), int(triangles[k+(i+1)%3])
			if (values[a] >= level) == (values[b] >= level) {
				parent[root(a)] = root(b)
			}
		}
	}
	for i := range n {
		if root(i) != i {
			continue
		}
		if values[i] >= level {
			above++
		} else {
			below++
		}
	}
	return above, below
}

func TestContoursOfRandomFields(t *testing.T) {
	for seed := range uint64(40) {
		random := rand.New(rand.NewPCG(seed, 11))
		x, y, triangles := gridMesh(3+int(seed)%9, 0.7, seed)
		values := make([]float64, len(x))
		for i := range values {
			if values[i] = random.Float64() * 4; seed%2 == 0 {
				values[i] = math.Floor(values[i]) // many nodes exactly on a level, plateaus, crests
			}
		}
		for _, c := range mustContours(t, x, y, triangles, values, []float64{0, 0.5, 1, 1.5, 2, 3, 4}) {
			checkContours(t, x, y, triangles, values, c)
		}
	}
}

// Nodes exactly on the level: the line through a row of nodes comes out once, without gaps.
func TestContourThroughNodes(t *testing.T) {
	x, y, triangles := gridMesh(8, 0, 1)
	for _, rising := range []float64{1, -1} {
		values := field(x, y, func(x, y float64) float64 { return rising * x })
		c := mustContours(t, x, y, triangles, values, []float64{0})
		if len(c[0].Lines) != 1 {
			t.Fatalf("%d lines", len(c[0].Lines))
		}
		l := c[0].Lines[0]
		if l.Closed || math.Abs(length(l.Points)-2) > 1e-15 {
			t.Errorf("closed %v, length %v, want 2: %v", l.Closed, length(l.Points), l.Points)
		}
	}
	peak := field(x, y, func(x, y float64) float64 { return -math.Abs(x) - math.Abs(y) })
	if c := mustContours(t, x, y, triangles, peak, []float64{0}); len(c[0].Lines) != 0 {
		t.Errorf("a peak exactly at the level is a point: %v", c[0].Lines)
	}
	crest := field(x, y, func(x, y float64) float64 { return -math.Abs(x) })
	if c := mustContours(t, x, y, triangles, crest, []float64{0}); len(c[0].Lines) > 2 {
		t.Errorf("a crest exactly at the level: %v", c[0].Lines)
	}
	flat := field(x, y, func(x, y float64) float64 { return 1 })
	for _, c := range mustContours(t, x, y, triangles, flat, []float64{0.5, 1, 1.5}) {
		if len(c.Lines) != 0 {
			t.Errorf("a flat field has a contour at %v", c.Level)
		}
	}
}

// The result does not hang on the order of triangles, of their corners, or which way round they are.
func TestContoursDoNotDependOnOrder(t *testing.T) {
	x, y, triangles := gridMesh(12, 0.5, 5)
	values := field(x, y, func(x, y float64) float64 { return math.Sin(4*x) * math.Cos(3*y) })
	levels := []float64{-0.5, 0, 0.25}
	want := mustContours(t, x, y, triangles, values, levels)
	random := rand.New(rand.NewPCG(9, 9))
	order := random.Perm(len(triangles) / 3)
	mixed := make([]int32, 0, len(triangles))
	for n, k := range order {
		c := triangles[3*k : 3*k+3]
		mixed = append(mixed, c[n%3], c[(n+1)%3], c[(n+2)%3])
		if n%4 == 0 {
			mixed[len(mixed)-1], mixed[len(mixed)-2] = mixed[len(mixed)-2], mixed[len(mixed)-1]
		}
	}
	got := mustContours(t, x, y, mixed, values, []float64{0.25, -0.5, 0, 0})
	if len(got) != len(want) {
		t.Fatalf("%d levels", len(got))
	}
	for i := range want {
		if len(got[i].Lines) != len(want[i].Lines) {
			t.Fatalf("level %v: %d lines, want %d", got[i].Level, len(got[i].Lines), len(want[i].Lines))
		}
		for j, l := range want[i].Lines {
			if !slices.Equal(l.Points, got[i].Lines[j].Points) {
				t.Errorf("level %v line %d differs", got[i].Level, j)
			}
		}
	}
}

func TestContoursRefuse(t *testing.T) {
	x, y, triangles := []float64{0, 1, 0}, []float64{0, 0, 1}, []int32{0, 1, 2}
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if _, err := Contours(x, y, triangles, []float64{0, bad, 1}, []float64{0.5}); err == nil {
			t.Errorf("value %v: want an error", bad)
		}
		if _, err := Contours([]float64{0, bad, 0}, y, triangles, x, []float64{0.5}); err == nil {
			t.Errorf("coordinate %v: want an error", bad)
		}
		if _, err := Contours(x, y, triangles, x, []float64{bad}); err == nil {
			t.Errorf("level %v: want an error", bad)
		}
	}
	for name, call := range map[string]func(){
		"lengths":      func() { _, _ = Contours(x, y[:2], triangles, x, nil) },
		"corners":      func() { _, _ = Contours(x, y, triangles[:2], x, nil) },
		"node number":  func() { _, _ = Contours(x, y, []int32{0, 1, 3}, x, nil) },
		"third on one": func() { _, _ = Contours(x, y, []int32{0, 1, 2, 0, 1, 2, 0, 1, 2}, x, nil) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: want a panic", name)
				}
			}()
			call()
		}()
	}
	huge := mustContours(t, x, y, triangles, []float64{-math.MaxFloat64, math.MaxFloat64, math.MaxFloat64}, []float64{0})
	if p := huge[0].Lines[0].Points; math.Abs(p[0][0]+p[0][1]-0.5) > 1e-15 || math.Abs(p[1][0]+p[1][1]-0.5) > 1e-15 {
		t.Errorf("values at the limit of float64: %v", p)
	}
}

func TestNiceLevels(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		n         int
		want      []float64
	}{
		{0, 1, 4, []float64{0.2, 0.4, 0.6, 0.8}},
		{0, 1, 9, []float64{0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9}},
		{-3.2, 3.2, 3, []float64{-2, 0, 2}},
		{0.0123, 0.0181, 5, []float64{0.013, 0.014, 0.015, 0.016, 0.017, 0.018}},
		{1000, 9000, 3, []float64{2000, 4000, 6000, 8000}},
	} {
		if got := NiceLevels(c.low, c.high, c.n); !slices.Equal(got, c.want) {
			t.Errorf("%v to %v, %d: %v, want %v", c.low, c.high, c.n, got, c.want)
		}
	}
	for _, c := range [][3]float64{{1, 1, 5}, {2, 1, 5}, {math.NaN(), 1, 5}, {0, math.Inf(1), 5}, {0, 1, 0}, {0, 1, -3}, {1e17, 1e17 + 16, 5}} {
		if got := NiceLevels(c[0], c[1], int(c[2])); len(got) != 0 {
			t.Errorf("%v: %v", c, got)
		}
	}
	random := rand.New(rand.NewPCG(4, 4))
	for range 2000 {
		low := (random.Float64() - 0.5) * math.Pow(10, float64(random.IntN(12)-6))
		high := low + random.Float64()*math.Pow(10, float64(random.IntN(12)-6))
		n := 1 + random.IntN(30)
		levels := NiceLevels(low, high, n)
		if high-low > 1e-9*math.Abs(low) && (len(levels) < n/2 || len(levels) > 2*n+1) {
			t.Fatalf("%v to %v: %d levels for %d", low, high, len(levels), n)
		}
		for i, v := range levels {
			if !(v > low && v < high) || i > 0 && !(v > levels[i-1]) {
				t.Fatalf("%v to %v: %v", low, high, levels)
			}
		}
	}
}

func TestWriteContours(t *testing.T) {
	zone := System{code: 32630}
	x0, y0 := mustForward(zone, t, -3, 50)
	x, y, triangles := gridMesh(10, 0, 1)
	values := field(x, y, func(x, y float64) float64 { return 1 - math.Hypot(x, y) })
	for i := range x {
		x[i], y[i] = x0+1000*x[i], y0+1000*y[i]
	}
	contours := mustContours(t, x, y, triangles, values, []float64{0.5})
	text, err := WriteContours(contours, zone, "drawdown_m")
	if err != nil {
		t.Fatal(err)
	}
	again, err := WriteContours(mustContours(t, x, y, triangles, values, []float64{0.5}), zone, "drawdown_m")
	if err != nil || !bytes.Equal(text, again) {
		t.Errorf("not the same bytes: %v", err)
	}
	layer, findings := ReadLayer("contours.geojson", text, LayerOptions{})
	if len(findings) != 0 || len(layer.Features) != 1 {
		t.Fatalf("%v\n%s", findings, text)
	}
	f := layer.Features[0]
	if f.Properties["drawdown_m"] != 0.5 || f.Properties["closed"] != true || !slices.Equal(f.Keys, []string{"drawdown_m", "closed"}) {
		t.Errorf("properties %v %v", f.Keys, f.Properties)
	}
	back, err := Transform(WGS84, zone, f.Geometry)
	if err != nil {
		t.Fatal(err)
	}
	l := back.(orb.LineString)
	for i, p := range contours[0].Lines[0].Points {
		// Half of the seventh decimal of a degree is 6 mm.
		if d := math.Hypot(p[0]-l[i][0], p[1]-l[i][1]); d > 0.008 {
			t.Errorf("point %d is off by %v m", i, d)
		}
	}
	if _, err := WriteContours(contours, zone, " "); err == nil {
		t.Error("empty key: want an error")
	}
	far := []Contour{{Level: 1, Lines: []ContourLine{{Points: orb.LineString{{0, 0}, {1e9, 0}}}}}}
	if _, err := WriteContours(far, zone, "drawdown_m"); err == nil {
		t.Error("a point off the Earth: want an error")
	}
}

func BenchmarkContours(b *testing.B) {
	x, y, triangles := gridMesh(200, 0.5, 1)
	values := field(x, y, func(x, y float64) float64 { return math.Sin(5*x) * math.Cos(4*y) })
	levels := NiceLevels(-1, 1, 20)
	for b.Loop() {
		if _, err := Contours(x, y, triangles, values, levels); err != nil {
			b.Fatal(err)
		}
	}
}
