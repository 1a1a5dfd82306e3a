package mesh

import "fmt"

// ownerName names a ring (0 outline, 1.. holes) or, counted on, a line.
func ownerName(d Domain, owner int) string {
	rings := 1 + len(d.Holes)
	switch {
	case owner == 0:
		return "outline"
	case owner < rings:
		return fmt.Sprintf("hole %d", owner)
	case owner-rings < len(d.Lines) && d.Lines[owner-rings].Name != "":
		return d.Lines[owner-rings].Name
	}
	return fmt.Sprintf("line %d", owner-rings+1)
}

// pointName names a point for messages.
func pointName(p Point) string {
	if p.Name != "" {
		return p.Name
	}
	return fmt.Sprintf("point at (%.10g, %.10g)", p.At[0], p.At[1])
}
