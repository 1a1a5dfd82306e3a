package adjoint

import "springbound/wells"

// WatchLevels gives every well that is asked for, and has no row of its own yet, a row for the level in its bore: the drawdown there
// with the casing's logarithm and the linear loss, without the quadratic one. NewField does so for wells with a lowest level only. Rows
// are added behind the others in the order of the wells; call it before rows are asked for.
func (f *Field) WatchLevels(asked func(wells.Well) bool) {
	has := make([]bool, len(f.Wells))
	for _, x := range f.watched {
		if x.well >= 0 {
			has[x.well] = true
		}
	}
	for i, w := range f.Wells {
		if !has[i] && asked(w) {
			f.watched = append(f.watched, watched{receptor: -1, well: i, functional: f.boreLevel(i)})
		}
	}
}
