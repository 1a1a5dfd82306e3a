package convex

// proofTree records a search without cuts and tightening: how the tree was split, and the prices that close each leaf.
type proofTree struct {
	nodes []proofNode
	sign  float64
}

// proofNode is a node of the record. A leaf has no children; its prices are those of the rows, of the linear programme or of the
// proof that there is nothing.
type proofNode struct {
	column    int
	low, high float64
	down, up  int // children, 0 for a leaf
	prices    []float64
	empty     bool
}

// cutoff lets the linear programmes of a recorded tree run to their optimum.
func (t *proofTree) cutoff(v float64) float64 { return v }

func (t *proofTree) beaten(int)                                   {}
func (t *proofTree) leaf(int, *nodeLP, lpEnd)                     {}
func (t *proofTree) split(int, candidate, *mixedNode, *mixedNode) {}
func (s *search) proofOfRoot()                                    {}
