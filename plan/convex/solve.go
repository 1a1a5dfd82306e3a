package convex

import (
	"context"
	"errors"
)

// Solve is replaced below.
func Solve(ctx context.Context, p *Problem, o Options) (*Solution, error) {
	return nil, errors.New("convex: not built")
}
