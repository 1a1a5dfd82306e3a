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
