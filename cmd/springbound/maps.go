package main

import (
	"fmt"
	"math"
	"runtime"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/gisio"
)

// contourCount is about how many lines a map gets: enough to read a gradient, few enough to label.
const contourCount = 10

// maps gathers the contour files of a run. Fields are contoured in the background while the run goes on; what comes out stands in the order
// in which the maps were asked for.
type maps struct {
	job   *job
	idle  chan *gisio.ContourMesh // one mesh for each worker that may contour at the same time
	of    *aquifer.Model          // whose mesh they are
	slots []*mapFile
}

// mapFile is one map: being drawn until done is closed.
type mapFile struct {
	outputFile
	err  error
	done chan struct{}
}

func newMaps(j *job) *maps { return &maps{job: j} }

// wait returns the files when all are drawn, with the first error in their order.
func (m *maps) wait() ([]outputFile, error) {
	files := make([]outputFile, len(m.slots))
	var first error
	for i, s := range m.slots {
		<-s.done
		if s.err != nil && first == nil {
			first = s.err
		}
		files[i] = s.outputFile
	}
	return files, first
}

// prepare finds the edges of the job's mesh once and makes a contour mesh for each worker.
func (m *maps) prepare() error {
	if m.of == m.job.field.Model {
		return nil
	}
	m.of = m.job.field.Model
	msh := m.of.Mesh
	mesh, err := gisio.NewContourMesh(msh.X, msh.Y, msh.Triangles)
	if err != nil {
		return err
	}
	workers := runtime.GOMAXPROCS(0)
	m.idle = make(chan *gisio.ContourMesh, workers)
	m.idle <- mesh
	for range workers - 1 {
		m.idle <- mesh.Share()
	}
	return nil
}

// add contours a nodal field and writes it in longitude and latitude. unitKey is the property that holds the level, with its unit.
func (m *maps) add(name, unitKey string, field []float64) error {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range field {
		low, high = math.Min(low, v), math.Max(high, v)
	}
	return m.addLevels(name, unitKey, field, gisio.NiceLevels(low, high, contourCount), nil)
}

// addLevels is add for given levels; label, where not nil, turns a level into the number written. The field may not change afterwards.
func (m *maps) addLevels(name, unitKey string, field, levels []float64, label func(level float64) float64) error {
	if err := m.prepare(); err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	s := &mapFile{outputFile: outputFile{name: name}, done: make(chan struct{})}
	m.put(s)
	idle := m.idle
	mesh := <-idle
	go func() {
		defer func() {
			idle <- mesh
			close(s.done)
		}()
		contours, err := mesh.Contours(field, levels)
		if err != nil {
			s.err = fmt.Errorf("%s: %w", name, err)
			return
		}
		for i := range contours {
			if label != nil {
				contours[i].Level = label(contours[i].Level)
			}
		}
		s.data, s.err = gisio.WriteContours(contours, m.job.project.Plane, unitKey)
	}()
	return nil
}

// put takes a map into the list; one of the same name is replaced: planned again with features that switch.
func (m *maps) put(s *mapFile) {
	for i := range m.slots {
		if m.slots[i].name == s.name {
			m.slots[i] = s
			return
		}
	}
	m.slots = append(m.slots, s)
}

// finished takes a file that is drawn already.
func (m *maps) finished(f outputFile) {
	done := make(chan struct{})
	close(done)
	m.put(&mapFile{outputFile: f, done: done})
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
