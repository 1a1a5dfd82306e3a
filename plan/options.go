package plan

import "fmt"

// Options steer Make. The zero value is the documented default.
type Options struct {
	// MaxRounds bounds how often the aquifer is linearised at a new plan when rows are not linear; 0 stands for 200.
	MaxRounds int
	// Firm asks for the firm capacity: a further plan with each well out of service.
	Firm bool
	// Problem, when given, is called once with the programme that the rates or the conflict of the report come from.
	Problem func(*ProblemFile)
	// Progress, when given, is called after each round from the calling goroutine.
	Progress func(Progress)
}

// Progress tells how far Make is.
type Progress struct {
	Round int     // programmes solved so far
	Total float64 // total pumped rate of the decided wells [m³/d]
	Cuts  int     // tangents added in this round; 0 ends the loop
}

// defaultRounds is far above what convex rows need (each round adds the worst place of a wetland once) and ends a model that
// answers at random.
const defaultRounds = 200

// Validate returns an error that names the field at fault.
func (o Options) Validate() error {
	if o.MaxRounds < 0 {
		return fmt.Errorf("plan: Options.MaxRounds %d is negative", o.MaxRounds)
	}
	return nil
}

func (o Options) rounds() int {
	if o.MaxRounds > 0 {
		return o.MaxRounds
	}
	return defaultRounds
}
