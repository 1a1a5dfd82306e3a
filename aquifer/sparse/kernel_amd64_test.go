package sparse

import "testing"

// The whole path, analysis aside, gives the same bits on a processor without AVX.
func TestPortableCodeGivesTheSameBytes(t *testing.T) {
	if !wide {
		t.Skip("no AVX: only the portable code runs here")
	}
	p := jitteredMesh(60, 55, 1000, 8)
	b := randomVector(p.Pattern.N*11, 3)
	f := mustFactor(t, p, Options{})
	x := mustSolve(t, f, b, 11)
	wide = false
	defer func() { wide = true }()
	g := mustFactor(t, p, Options{})
	if !sameBits(f.panels, g.panels) {
		t.Error("the portable code makes another factor")
	}
	if !sameBits(x, mustSolve(t, g, b, 11)) {
		t.Error("the portable code makes another solution")
	}
}
