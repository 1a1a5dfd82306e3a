package convex

// Place says where a variable stands in a basis. A row counts as a variable too: its value is the row's value.
type Place uint8

// The places.
const (
	Basic   Place = iota // between its bounds, solved for
	AtLower              // at its lower bound
	AtUpper              // at its upper bound
	AtZero               // free and not basic: held at zero
)

// String returns the name of the place.
func (s Place) String() string {
	switch s {
	case Basic:
		return "basic"
	case AtLower:
		return "at lower"
	case AtUpper:
		return "at upper"
	case AtZero:
		return "at zero"
	}
	return "unknown"
}

// Basis is where a solve ended, to start another one from. It stays usable after AddRow (the new row is basic), after changed
// bounds and after changed costs; places that no longer fit are repaired and a singular set is replaced in part by rows.
type Basis struct {
	columns []Place
	rows    []Place
}

// Column returns the place of column j.
func (b *Basis) Column(j int) Place { return b.columns[j] }

// Row returns the place of row i; rows added later are basic.
func (b *Basis) Row(i int) Place {
	if i >= len(b.rows) {
		return Basic
	}
	return b.rows[i]
}
