//go:build linux

package sparse_test

import (
	"bufio"
	"context"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"runtime/debug"
	"slices"
	"strconv"
	"syscall"
	"testing"
	"time"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
	"springbound/aquifer/sparse"
)

// The files by which this solver and another get the same matrix, see .ci/side-by-side/cholesky.
const (
	matrixMagic     = "SPDMAT01"
	tableReceptors  = 100
	tableWells      = 1000
	adjointsInBlock = 32 // as package adjoint solves them
)

// table is a matrix and where the sensitivity table has its rows and columns.
type table struct {
	matrix    sparse.Matrix
	x, y      []float64
	receptors []int32
	wells     []int32
}

// wellsMesh meshes 24 x 16 km with 100 receptors and 1,000 wells, finer by four there, into about the given number of nodes.
func wellsMesh(nodes int) (*mesh.Mesh, error) {
	random := rand.New(rand.NewPCG(7, 11))
	d := mesh.Domain{Outer: orb.Ring{{0, 0}, {24000, 0}, {24000, 16000}, {0, 16000}}}
	for range tableReceptors + tableWells {
		d.Points = append(d.Points, mesh.Point{At: orb.Point{200 + 23600*random.Float64(), 200 + 15600*random.Float64()}})
	}
	asked := float64(nodes)
	for range 6 {
		size := math.Sqrt(24000 * 16000 / asked)
		for k := range d.Points {
			d.Points[k].Size = size / 4
		}
		m, err := mesh.Build(context.Background(), d, mesh.Options{Coarsest: size, MaxNodes: 2 * nodes})
		if err != nil {
			return nil, err
		}
		share := float64(nodes) / float64(len(m.X))
		if math.Abs(share-1) < 0.1 {
			return m, nil
		}
		asked *= share
	}
	return nil, fmt.Errorf("no mesh of about %d nodes found", nodes)
}

// meshMatrix assembles two-point fluxes (cotangents of the angles opposite each edge) with log-normal nodal
// transmissivities, sigma ln T = 1.5, and a head-dependent western edge.
func meshMatrix(nodes int) (table, error) {
	m, err := wellsMesh(nodes)
	if err != nil {
		return table{}, err
	}
	random := rand.New(rand.NewPCG(7, 12))
	logT := make([]float64, len(m.X))
	for i := range logT {
		logT[i] = 1.5 * random.NormFloat64()
	}
	var i, j []int32
	var c []float64
	for t := range len(m.Triangles) / 3 {
		for k := range 3 {
			o, a, b := m.Triangles[3*t+k], m.Triangles[3*t+(k+1)%3], m.Triangles[3*t+(k+2)%3]
			ax, ay, bx, by := m.X[a]-m.X[o], m.Y[a]-m.Y[o], m.X[b]-m.X[o], m.Y[b]-m.Y[o]
			i, j = append(i, a), append(j, b)
			c = append(c, 500*math.Exp((logT[a]+logT[b])/2)*(ax*bx+ay*by)/(2*(ax*by-ay*bx)))
		}
	}
	p, slots := sparse.NewPattern(len(m.X), i, j)
	values := make([]float64, len(p.Index))
	for k, v := range c {
		values[slots.Pair[k]] -= v
		values[slots.Diagonal[i[k]]] += v
		values[slots.Diagonal[j[k]]] += v
	}
	for v, x := range m.X {
		if x == 0 {
			values[slots.Diagonal[v]] += 500
		}
	}
	return table{sparse.Matrix{Pattern: p, Values: values}, m.X, m.Y, m.PointNode[:tableReceptors], m.PointNode[tableReceptors:]}, nil
}

func (t *table) write(w io.Writer) error {
	p := t.matrix.Pattern
	head := []int64{int64(p.N), int64(len(p.Index)), int64(len(t.receptors)), int64(len(t.wells))}
	starts := make([]int64, len(p.Ptr))
	for k, v := range p.Ptr {
		starts[k] = int64(v)
	}
	for _, part := range []any{[]byte(matrixMagic), head, starts, p.Index, t.matrix.Values, t.receptors, t.wells, t.x, t.y} {
		if err := binary.Write(w, binary.LittleEndian, part); err != nil {
			return err
		}
	}
	return nil
}

// readTable reads in pieces, so that reading needs no second copy of anything.
func readTable(name string) (*table, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	r := bufio.NewReader(f)
	magic := make([]byte, len(matrixMagic))
	var head [4]int64
	if _, err := io.ReadFull(r, magic); err != nil || string(magic) != matrixMagic {
		return nil, fmt.Errorf("%s is not a matrix file (%v)", name, err)
	}
	if err := binary.Read(r, binary.LittleEndian, &head); err != nil {
		return nil, err
	}
	n, entries := head[0], head[1]
	p := &sparse.Pattern{N: int(n), Ptr: make([]int, n+1), Index: make([]int32, entries)}
	t := &table{matrix: sparse.Matrix{Pattern: p, Values: make([]float64, entries)},
		x: make([]float64, n), y: make([]float64, n), receptors: make([]int32, head[2]), wells: make([]int32, head[3])}
	for _, part := range []any{p.Ptr, p.Index, t.matrix.Values, t.receptors, t.wells, t.x, t.y} {
		if err := readWords(r, part); err != nil {
			return nil, err
		}
	}
	return t, nil
}

func readWords(r io.Reader, to any) error {
	var word [8]byte
	var failed error
	next := func(size int) uint64 {
		clear(word[:])
		if _, err := io.ReadFull(r, word[:size]); err != nil && failed == nil {
			failed = err
		}
		return binary.LittleEndian.Uint64(word[:])
	}
	switch to := to.(type) {
	case []int:
		for k := range to {
			to[k] = int(next(8))
		}
	case []int32:
		for k := range to {
			to[k] = int32(next(4))
		}
	case []float64:
		for k := range to {
			to[k] = math.Float64frombits(next(8))
		}
	}
	return failed
}

// TestWriteMatrix writes the matrix of a mesh of about SPRINGBOUND_MATRIX_NODES nodes to the file SPRINGBOUND_MATRIX.
func TestWriteMatrix(t *testing.T) {
	name, nodes := os.Getenv("SPRINGBOUND_MATRIX"), os.Getenv("SPRINGBOUND_MATRIX_NODES")
	if name == "" || nodes == "" {
		t.Skip("SPRINGBOUND_MATRIX and SPRINGBOUND_MATRIX_NODES name no file to write")
	}
	count, err := strconv.Atoi(nodes)
	if err != nil {
		t.Fatal(err)
	}
	m, err := meshMatrix(count)
	if err != nil {
		t.Fatal(err)
	}
	f, err := os.Create(name)
	if err != nil {
		t.Fatal(err)
	}
	w := bufio.NewWriter(f)
	if err := m.write(w); err != nil {
		t.Fatal(err)
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
}

// TestSideBySide makes the sensitivity table of the matrix in the file SPRINGBOUND_MATRIX once, with whole fields in blocks
// or, where SPRINGBOUND_TABLE=selected, at the wells alone, and prints the figures that cholesky.c prints for the other side.
func TestSideBySide(t *testing.T) {
	name := os.Getenv("SPRINGBOUND_MATRIX")
	if name == "" || os.Getenv("SPRINGBOUND_MATRIX_NODES") != "" {
		t.Skip("SPRINGBOUND_MATRIX names no file to read")
	}
	workers, _ := strconv.Atoi(os.Getenv("SPRINGBOUND_WORKERS"))
	in, err := readTable(name)
	if err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	n := in.matrix.Pattern.N
	start := clock(t)
	s, err := sparse.Analyse(ctx, in.matrix.Pattern, in.x, in.y, sparse.Options{Workers: workers})
	if err != nil {
		t.Fatal(err)
	}
	if n > 500000 {
		debug.SetGCPercent(30) // so does the command, and it collects between the stages of large jobs
		runtime.GC()
	}
	analysed := clock(t)
	f, err := s.Factor(ctx, in.matrix.Values)
	if err != nil {
		t.Fatal(err)
	}
	factored := clock(t)
	var values [][]float64
	if os.Getenv("SPRINGBOUND_TABLE") == "selected" {
		values = selectedTable(t, f, in)
	} else {
		values = wholeTable(t, f, in)
	}
	done := clock(t)
	peak := peakMB(t)

	block := make([]float64, 16*n)
	from := time.Now()
	in.solve(t, f, block, 0, 16)
	sixteen := time.Since(from)
	var one []time.Duration
	for r := range 5 {
		from := time.Now()
		in.solve(t, f, block[:n], r, 1)
		one = append(one, time.Since(from))
	}
	slices.Sort(one)
	worst, right := 0.0, make([]float64, n)
	for r := 0; r < len(in.receptors); r += 10 {
		in.solve(t, f, block[:n], r, 1)
		right[in.receptors[r]] = 1
		worst = max(worst, in.matrix.Residual(block[:n], right))
		right[in.receptors[r]] = 0
		for w, node := range in.wells {
			if a, b := values[r][w], block[node]; !(math.Abs(a-b) <= 1e-9*math.Abs(b)) { // two orders of the same sums
				t.Fatalf("receptor %d at well %d: %v and %v", r, w, a, b)
			}
		}
	}
	sum := 0.0
	for _, row := range values {
		for _, v := range row {
			sum += v
		}
	}
	wall := func(a, b reading) float64 { return ms(b.wall.Sub(a.wall)) }
	cpu := func(a, b reading) float64 { return ms(b.cpu - a.cpu) }
	fmt.Printf("figures %d %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.0f %.1e %.12g %.2f\n", n,
		wall(start, analysed), wall(analysed, factored), wall(factored, done), wall(start, done),
		cpu(start, analysed), cpu(analysed, factored), cpu(factored, done), cpu(start, done),
		ms(one[2]), ms(sixteen), peak, worst, sum, float64(s.NonZeros())/1e6)
}

func ms(d time.Duration) float64 { return d.Seconds() * 1e3 }

// reading is the time of day and the processor time of all threads so far.
type reading struct {
	wall time.Time
	cpu  time.Duration
}

func clock(t *testing.T) reading {
	u := usage(t)
	return reading{time.Now(), time.Duration(u.Utime.Nano() + u.Stime.Nano())}
}

func peakMB(t *testing.T) float64 { return float64(usage(t).Maxrss) / 1024 }

func usage(t *testing.T) syscall.Rusage {
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		t.Fatal(err)
	}
	return u
}

// solve fills the block with the unit right-hand sides of k receptors and solves for them.
func (t *table) solve(tb testing.TB, f *sparse.Factor, block []float64, from, k int) {
	n := t.matrix.Pattern.N
	clear(block[:n*k])
	for r := range k {
		block[r*n+int(t.receptors[(from+r)%len(t.receptors)])] = 1
	}
	if err := f.Solve(context.Background(), block[:n*k], k); err != nil {
		tb.Fatal(err)
	}
}

func wholeTable(tb testing.TB, f *sparse.Factor, in *table) [][]float64 {
	n := in.matrix.Pattern.N
	block := make([]float64, adjointsInBlock*n)
	var values [][]float64
	for from := 0; from < len(in.receptors); from += adjointsInBlock {
		k := min(adjointsInBlock, len(in.receptors)-from)
		in.solve(tb, f, block, from, k)
		for r := range k {
			row := make([]float64, len(in.wells))
			for w, node := range in.wells {
				row[w] = block[r*n+int(node)]
			}
			values = append(values, row)
		}
	}
	return values
}

func selectedTable(tb testing.TB, f *sparse.Factor, in *table) [][]float64 {
	rhs := make([]sparse.SparseVector, len(in.receptors))
	for r, node := range in.receptors {
		rhs[r] = sparse.SparseVector{Index: []int32{node}, Value: []float64{1}}
	}
	values, err := f.SolveSelected(context.Background(), rhs, in.wells)
	if err != nil {
		tb.Fatal(err)
	}
	return values
}
