package mesh

import (
	"math"
	"math/big"
	"math/rand"
	"testing"
)

// ratOf is a float as a rational.
func ratOf(x float64) *big.Rat { return new(big.Rat).SetFloat64(x) }

// sub, mul on rationals.
func sub(a, b *big.Rat) *big.Rat { return new(big.Rat).Sub(a, b) }
func mul(a, b *big.Rat) *big.Rat { return new(big.Rat).Mul(a, b) }

// orientBig is the sign of orient in rational arithmetic.
func orientBig(p [8]float64) int {
	ax, ay, bx, by, cx, cy := ratOf(p[0]), ratOf(p[1]), ratOf(p[2]), ratOf(p[3]), ratOf(p[4]), ratOf(p[5])
	return sub(mul(sub(ax, cx), sub(by, cy)), mul(sub(ay, cy), sub(bx, cx))).Sign()
}

// inCircleBig is the sign of inCircle in rational arithmetic.
func inCircleBig(p [8]float64) int {
	dx, dy := ratOf(p[6]), ratOf(p[7])
	var x, y, l [3]*big.Rat
	for i := range 3 {
		x[i], y[i] = sub(ratOf(p[2*i]), dx), sub(ratOf(p[2*i+1]), dy)
		l[i] = new(big.Rat).Add(mul(x[i], x[i]), mul(y[i], y[i]))
	}
	sum := new(big.Rat)
	for i := range 3 {
		j, k := (i+1)%3, (i+2)%3
		sum.Add(sum, mul(l[i], sub(mul(x[j], y[k]), mul(x[k], y[j]))))
	}
	return sum.Sign()
}

// sign of a float.
func sign(x float64) int {
	switch {
	case x > 0:
		return 1
	case x < 0:
		return -1
	}
	return 0
}

// hardPoints makes four points in one of several nearly degenerate ways.
func hardPoints(rng *rand.Rand) (p [8]float64) {
	nudge := func(x float64) float64 {
		for range rng.Intn(3) {
			x = math.Nextafter(x, math.Inf(1-2*rng.Intn(2)))
		}
		return x
	}
	switch rng.Intn(6) {
	case 0: // anywhere
		for i := range p {
			p[i] = rng.NormFloat64()
		}
	case 1: // small whole numbers: often exactly in line or on a circle
		for i := range p {
			p[i] = float64(rng.Intn(7))
		}
	case 2: // a line at large offset, nudged
		for i := range 4 {
			s := rng.Float64()
			p[2*i], p[2*i+1] = nudge(500000+s*1000), nudge(4000000+s*3000)
		}
	case 3: // a circle at large offset, nudged
		for i := range 4 {
			s, c := math.Sincos(2 * math.Pi * rng.Float64())
			p[2*i], p[2*i+1] = nudge(500000+10*c), nudge(4000000+10*s)
		}
	case 4: // a square, nudged, at some scale
		h := math.Ldexp(1, rng.Intn(60)-30)
		for i, c := range [8]float64{0, 0, 1, 0, 1, 1, 0, 1} {
			p[i] = nudge(h * (c + 3))
		}
	default: // very different magnitudes
		for i := range p {
			p[i] = rng.NormFloat64() * math.Ldexp(1, rng.Intn(60)-40)
		}
	}
	return p
}

func TestPredicatesAreExact(t *testing.T) {
	rng := rand.New(rand.NewSource(5))
	n := 5000
	if long() {
		n = 1000000
	}
	for range n {
		p := hardPoints(rng)
		if have, want := sign(orient(p[0], p[1], p[2], p[3], p[4], p[5])), orientBig(p); have != want {
			t.Fatalf("orient%v: %d, want %d", p[:6], have, want)
		}
		if have, want := sign(orientExact(p[0], p[1], p[2], p[3], p[4], p[5])), orientBig(p); have != want {
			t.Fatalf("orientExact%v: %d, want %d", p[:6], have, want)
		}
		if have, want := sign(inCircle(p[0], p[1], p[2], p[3], p[4], p[5], p[6], p[7])), inCircleBig(p); have != want {
			t.Fatalf("inCircle%v: %d, want %d", p, have, want)
		}
		if have, want := sign(inCircleExact(p[0], p[1], p[2], p[3], p[4], p[5], p[6], p[7])), inCircleBig(p); have != want {
			t.Fatalf("inCircleExact%v: %d, want %d", p, have, want)
		}
	}
}

func TestHilbertCurveStepsToNeighbours(t *testing.T) {
	// On the coarsest 32 by 32 cells of the curve each place follows its neighbour.
	const side, cell = 32, 1 << hilbertBits / 32
	at := make([][2]int, side*side)
	for x := range side {
		for y := range side {
			k := hilbertKey(uint32(x*cell), uint32(y*cell)) / (cell * cell)
			at[k] = [2]int{x, y}
		}
	}
	for i := 1; i < len(at); i++ {
		dx, dy := at[i][0]-at[i-1][0], at[i][1]-at[i-1][1]
		if dx*dx+dy*dy != 1 {
			t.Fatalf("step %d from %v to %v", i, at[i-1], at[i])
		}
	}
}

func BenchmarkInCircle(b *testing.B) {
	rng := rand.New(rand.NewSource(1))
	var p [256]float64
	for i := range p {
		p[i] = rng.Float64()
	}
	i, sum := 0, 0.0
	for b.Loop() {
		q := p[i&127:]
		sum += inCircle(q[0], q[1], q[2], q[3], q[4], q[5], q[6], q[7])
		i++
	}
	_ = sum
}
