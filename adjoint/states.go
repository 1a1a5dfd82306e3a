package adjoint

import (
	"springbound/wells"
)

// InState returns the field in an operating state in which every recharge is that of this field times a factor. It shares the matrix,
// so that its linear rows have the same slopes; heads, values without pumping and what switches are its own. Rows are in the order of
// this field's.
func (f *Field) InState(rechargeFactor float64) (*Field, error) {
	m := f.Model.WithRecharge(rechargeFactor)
	out, err := NewField(m, f.Wells, f.Receptors)
	if err != nil {
		return nil, err
	}
	watched := make(map[string]bool, len(f.Wells))
	for _, x := range f.watched {
		if x.well >= 0 {
			watched[f.Wells[x.well].ID] = true
		}
	}
	out.WatchLevels(func(w wells.Well) bool { return watched[w.ID] })
	if f.placeSlope == nil {
		f.placeSlope = map[int32][]float64{}
	}
	out.placeSlope = f.placeSlope
	return out, nil
}
