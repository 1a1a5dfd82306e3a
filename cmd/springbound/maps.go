package main

import (
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/gisio"
)

// contourCount is about how many lines a map gets: enough to read a gradient, few enough to label.
const contourCount = 10

// maps gathers the contour files of a run.
type maps struct {
	job   *job
	mesh  *gisio.ContourMesh
	files []outputFile
}

func newMaps(j *job) *maps { return &maps{job: j} }

// add contours a nodal field and writes it in longitude and latitude. unitKey is the property that holds the level, with its unit.
func (m *maps) add(name, unitKey string, field []float64) error {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range field {
		low, high = math.Min(low, v), math.Max(high, v)
	}
	return m.addLevels(name, unitKey, field, gisio.NiceLevels(low, high, contourCount), nil)
}

// addLevels is add for given levels; label, where not nil, turns a level into the number written.
func (m *maps) addLevels(name, unitKey string, field, levels []float64, label func(level float64) float64) error {
	if m.mesh == nil {
		msh := m.job.field.Model.Mesh
		prepared, err := gisio.NewContourMesh(msh.X, msh.Y, msh.Triangles)
		if err != nil {
			return fmt.Errorf("%s: %w", name, err)
		}
		m.mesh = prepared
	}
	contours, err := m.mesh.Contours(field, levels)
	if err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	for i := range contours {
		if label != nil {
			contours[i].Level = label(contours[i].Level)
		}
	}
	data, err := gisio.WriteContours(contours, m.job.project.Plane, unitKey)
	if err != nil {
		return err
	}
	for i := range m.files {
		if m.files[i].name == name { // planned again with features that switch
			m.files[i].data = data
			return nil
		}
	}
	m.files = append(m.files, outputFile{name, data})
	return nil
}

// influence contours a receptor's sensitivity to a unit rate pumped anywhere.
func (m *maps) influence(row int, z []float64) error {
	r, ok := m.job.field.Receptor(row)
	if !ok {
		return nil
	}
	unit := map[string]string{"m": "influence_m_per_1000_m3_per_d", "m3/d": "influence_m3_per_d_per_1000_m3_per_d", "1": "influence_per_1000_m3_per_d"}[r.Kind.Unit()]
	scaled := make([]float64, len(z))
	for n, v := range z {
		scaled[n] = 1000 * v
	}
	return m.add("influence/"+r.ID+".geojson", unit, scaled)
}

// heads contours the head without pumping, at the plan, and the drawdown between them.
func (m *maps) heads(s *adjoint.State) error {
	drawdown := make([]float64, len(s.Heads))
	for n := range drawdown {
		drawdown[n] = s.Base[n] - s.Heads[n]
	}
	for _, f := range []struct {
		name, unit string
		field      []float64
	}{{"head_without_pumping.geojson", "head_m", s.Base}, {"head_at_plan.geojson", "head_m", s.Heads}, {"drawdown_at_plan.geojson", "drawdown_m", drawdown}} {
		if err := m.add(f.name, f.unit, f.field); err != nil {
			return err
		}
	}
	return nil
}
