package mesh

// hilbertBits is the resolution of the curve in each direction: 65,536 cells a side, finer than a million nodes need.
const hilbertBits = 16

// hilbertTurn holds, for each of the four ways in which the curve may run through a square and each quarter of it (x bit, y bit), the
// number of the quarter along the curve and the way through it: 4 way + number.
var hilbertTurn = [16]uint8{
	4*1 + 0, 4*0 + 1, 4*3 + 3, 4*0 + 2,
	4*0 + 0, 4*2 + 3, 4*1 + 1, 4*1 + 2,
	4*2 + 2, 4*1 + 3, 4*2 + 1, 4*3 + 0,
	4*3 + 2, 4*3 + 1, 4*0 + 3, 4*2 + 0,
}

// hilbertKey is the place of the cell (x, y) on the curve.
func hilbertKey(x, y uint32) uint32 {
	var d uint32
	way := uint32(0)
	for i := hilbertBits - 1; i >= 0; i-- {
		e := uint32(hilbertTurn[(4*way+(x>>i&1)*2+y>>i&1)&15])
		d = d<<2 | e&3
		way = e >> 2
	}
	return d
}

// hilbertOrder sorts the indices of n points along a Hilbert curve; equal cells keep their order.
func hilbertOrder(n int, at func(i int) (x, y float64)) []int32 {
	if n == 0 {
		return nil
	}
	x0, y0 := at(0)
	x1, y1 := x0, y0
	for i := 1; i < n; i++ {
		x, y := at(i)
		x0, x1 = min(x0, x), max(x1, x)
		y0, y1 = min(y0, y), max(y1, y)
	}
	side := max(x1-x0, y1-y0)
	scale := 0.0
	if side > 0 {
		scale = float64(1<<hilbertBits-1) / side
	}
	keys := make([]uint64, n)
	inParallel(n, func(from, to int) {
		for i := from; i < to; i++ {
			x, y := at(i)
			keys[i] = uint64(hilbertKey(uint32((x-x0)*scale), uint32((y-y0)*scale)))<<32 | uint64(i)
		}
	})
	order := make([]int32, n)
	for i, k := range sortKeys(keys) {
		order[i] = int32(uint32(k))
	}
	return order
}

// sortKeys sorts by the upper 32 bits, equal ones in their order: a radix sort with digits of 11 bits.
func sortKeys(keys []uint64) []uint64 {
	const bits, size = 11, 1 << 11
	other := make([]uint64, len(keys))
	for shift := 32; shift < 64; shift += bits {
		var start [size]int
		for _, k := range keys {
			start[k>>shift&(size-1)]++
		}
		sum := 0
		for i, c := range start {
			start[i] = sum
			sum += c
		}
		for _, k := range keys {
			d := k >> shift & (size - 1)
			other[start[d]] = k
			start[d]++
		}
		keys, other = other, keys
	}
	return keys
}
