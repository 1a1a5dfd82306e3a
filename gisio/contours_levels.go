package gisio

import (
	"math"
	"strconv"
)

// mostLevels bounds what NiceLevels gives: more lines cannot be told apart on a map.
const mostLevels = 1000

// NiceLevels gives about n levels, strictly between lowest and highest, at whole multiples of 1, 2 or 5 times a power of
// ten: the step is the one whose number of levels is nearest to n, the larger step where two are as near. Each level is the number nearest
// to its decimal. There are none where lowest and highest are not finite, not in order or not apart by more than
// rounding, or n is not positive.
func NiceLevels(lowest, highest float64, n int) []float64 {
	span := highest - lowest
	if !(span > 0) || !finite(span) || n <= 0 {
		return nil
	}
	n = min(n, mostLevels)
	power := int(math.Floor(math.Log10(span / float64(n))))
	var best []float64
	for e := power + 1; e >= power-1; e-- {
		for _, m := range [...]int{5, 2, 1} {
			levels := multiplesBetween(lowest, highest, m, e, 10*n)
			if best == nil || distance(len(levels), n) < distance(len(best), n) {
				best = levels
			}
		}
	}
	return best
}

func distance(a, b int) int { return max(a-b, b-a) }

// multiplesBetween gives the multiples of m times ten to the power e strictly between lowest and highest, or nothing
// where they are more than most.
func multiplesBetween(lowest, highest float64, m, e, most int) []float64 {
	const wholeNumbers = 1 << 53 / 5 // up to here multiples are exact
	step := decimal(int64(m), e)
	first, last := math.Floor(lowest/step), math.Ceil(highest/step)
	if !(step > 0 && math.Abs(first) < wholeNumbers && math.Abs(last) < wholeNumbers && last-first <= float64(most)) {
		return nil
	}
	var out []float64
	for i := int64(first); i <= int64(last); i++ {
		if level := decimal(i*int64(m), e); level > lowest && level < highest {
			out = append(out, level)
		}
	}
	return out
}

// decimal gives the float64 nearest to m times ten to the power e.
func decimal(m int64, e int) float64 {
	x, err := strconv.ParseFloat(strconv.FormatInt(m, 10)+"e"+strconv.Itoa(e), 64)
	if err != nil {
		return math.NaN()
	}
	return x
}
