package sparse

import "math"

// directions are the lines along which nodes are swept: x, y and the two diagonals.
var directions = [4][2]float64{{1, 0}, {0, 1}, {math.Sqrt2 / 2, math.Sqrt2 / 2}, {math.Sqrt2 / 2, -math.Sqrt2 / 2}}

// sweepOrder returns the nodes ordered along a direction, ties by number. Positions are rounded to 2^-32 of the range,
// which is finer than any mesh needs; where that ties the order is still fixed.
func sweepOrder(x, y []float64, direction [2]float64) []int32 {
	n := len(x)
	low, high := math.Inf(1), math.Inf(-1)
	for i := range x {
		s := float64(x[i]*direction[0]) + float64(y[i]*direction[1])
		low, high = math.Min(low, s), math.Max(high, s)
	}
	scale := 0.0
	if high > low {
		scale = (1<<32 - 1) / (high - low)
	}
	keys := make([]uint64, n)
	for i := range x {
		s := float64(x[i]*direction[0]) + float64(y[i]*direction[1])
		keys[i] = uint64(uint32((s-low)*scale))<<32 | uint64(i)
	}
	keys = radixSort(keys)
	order := make([]int32, n)
	for p, k := range keys {
		order[p] = int32(uint32(k))
	}
	return order
}

// radixSort sorts by the upper 32 bits, stably, eleven bits at a time.
func radixSort(keys []uint64) []uint64 {
	const bits, size = 11, 1 << 11
	other := make([]uint64, len(keys))
	var count [3][size]uint32
	for _, k := range keys {
		h := k >> 32
		count[0][h&(size-1)]++
		count[1][h>>bits&(size-1)]++
		count[2][h>>(2*bits)&(size-1)]++
	}
	for pass := range 3 {
		sum := uint32(0)
		for d := range size {
			count[pass][d], sum = sum, sum+count[pass][d]
		}
		shift := 32 + bits*pass
		for _, k := range keys {
			d := k >> shift & (size - 1)
			other[count[pass][d]] = k
			count[pass][d]++
		}
		keys, other = other, keys
	}
	return keys
}

// nearby returns the rows so that those near each other in the plane mostly follow each other, for the sake of the
// caches: cells of about cellRows rows, by rank in x and y, along Morton's curve (1966). Ranks keep graded meshes even.
func nearby(alongX, alongY []int32) []int32 {
	const cellRows = 16
	n := len(alongX)
	bits := 0
	for cellRows<<(2*bits) < n {
		bits++
	}
	scale := float64(int(1)<<bits) / float64(n)
	cell := make([]int32, n)
	for p, v := range alongX {
		cell[v] = spread(uint32(float64(p) * scale))
	}
	for p, v := range alongY {
		cell[v] |= spread(uint32(float64(p)*scale)) << 1
	}
	count := make([]int32, 1<<(2*bits)+1)
	for _, c := range cell {
		count[c+1]++
	}
	for c := range count[1:] {
		count[c+1] += count[c]
	}
	rows := make([]int32, n)
	for v, c := range cell {
		rows[count[c]] = int32(v)
		count[c]++
	}
	return rows
}

// spread moves the lower 15 bits to the even places.
func spread(k uint32) int32 {
	k = (k | k<<8) & 0x00ff00ff
	k = (k | k<<4) & 0x0f0f0f0f
	k = (k | k<<2) & 0x33333333
	k = (k | k<<1) & 0x55555555
	return int32(k)
}
