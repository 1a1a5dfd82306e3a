package mesh

import "math"

// boxFan is how many boxes a box of the next level holds.
const boxFan = 4

// box is a rectangle along the axes.
type box struct{ x0, y0, x1, y1 float64 }

// emptyBox joins with anything.
func emptyBox() box { return box{math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)} }

// join widens a box to hold another.
func (b *box) join(c box) {
	b.x0, b.y0 = min(b.x0, c.x0), min(b.y0, c.y0)
	b.x1, b.y1 = max(b.x1, c.x1), max(b.y1, c.y1)
}

// meets says whether two boxes share a point.
func (b *box) meets(c *box) bool {
	return b.x0 <= c.x1 && c.x0 <= b.x1 && b.y0 <= c.y1 && c.y0 <= b.y1
}

// boxTree finds boxes that meet a box. Items that follow each other should be near each other.
type boxTree struct {
	levels [][]box // levels[0] are the items, the last level is one box
}

// newBoxTree makes the tree over items.
func newBoxTree(items []box) *boxTree {
	t := &boxTree{}
	for low := items; len(low) > 0; {
		t.levels = append(t.levels, low)
		if len(low) == 1 {
			break
		}
		high := make([]box, 0, (len(low)+boxFan-1)/boxFan)
		for i := 0; i < len(low); i += boxFan {
			b := emptyBox()
			for _, c := range low[i:min(i+boxFan, len(low))] {
				b.join(c)
			}
			high = append(high, b)
		}
		low = high
	}
	return t
}

// each calls visit for every item that meets q, in order, until visit gives false.
func (t *boxTree) each(q box, visit func(item int) bool) {
	top := len(t.levels) - 1
	if top < 0 {
		return
	}
	var stack [32 * boxFan][2]int32 // a level adds less than boxFan entries, and 32 levels hold any slice
	stack[0] = [2]int32{int32(top), 0}
	for n := 1; n > 0; {
		n--
		level, i := int(stack[n][0]), int(stack[n][1])
		if !t.levels[level][i].meets(&q) {
			continue
		}
		if level == 0 {
			if !visit(i) {
				return
			}
			continue
		}
		for j := min((i+1)*boxFan, len(t.levels[level-1])) - 1; j >= i*boxFan; j-- {
			stack[n] = [2]int32{int32(level - 1), int32(j)}
			n++
		}
	}
}
