package gisio

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/paulmach/orb"

	"springbound/aquifer"
	"springbound/plan"
	"springbound/wells"
)

// Project is everything that a project file and its layers and tables say, in metres and days.
type Project struct {
	File      string // base name of the project file
	Dir       string // its directory
	Title     string
	Plane     System // working plane; all places are metres in it
	PlaneNote string // how the plane was chosen
	Datum     string // vertical datum

	Site         aquifer.Site // Nodes: "well ID" for each well, "receptor ID" for each receptor point, "receptor ID to" for a front's second
	Wells        []wells.Well
	Receptors    []wells.Receptor
	Limits       []wells.Limit
	Licences     []wells.Licence
	States       []wells.OperatingState // one is the default; a single default state where none is given
	Observations []wells.Observation

	Brief       BriefSettings
	Mesh        MeshSettings
	Report      ReportSettings
	Inputs      []plan.InputFile  // every file that was read, the project file first
	Assumptions []plan.Assumption // every value in use, in the order of reading
}

// BriefSettings is the part of the brief that the project file states.
type BriefSettings struct {
	Aim    plan.Aim
	Demand *float64 // [m³/d]
	Quotas []plan.Quota

	AtMostRunning     *int
	Together, Exclude []plan.WellGroup
}

// MeshSettings are the wishes for the mesh; zero is not stated.
type MeshSettings struct {
	Nodes    int
	Finest   float64 // [m]
	Growth   float64 // [-]
	Accuracy float64 // [-]
}

// ReportSettings are the texts of the results.
type ReportSettings struct {
	PreparedFor, PreparedBy, Reference string
	Units                              string // unit in which rates are shown; "m3/d" where none is stated
}

// PlanBrief returns the brief for the planner; the terms of the wells are for the caller to add.
func (p *Project) PlanBrief() plan.Brief {
	return plan.Brief{Aim: p.Brief.Aim, Demand: p.Brief.Demand, Quotas: p.Brief.Quotas, Wells: p.Wells, Receptors: p.Receptors, Limits: p.Limits,
		Licences: p.Licences, States: p.States, AtMostRunning: p.Brief.AtMostRunning, Together: p.Brief.Together, Exclude: p.Brief.Exclude}
}

// ToLonLat returns longitude and latitude [degree] of a place in the plane.
func (p *Project) ToLonLat(at orb.Point) (orb.Point, error) {
	lon, lat, err := p.Plane.Inverse(at[0], at[1])
	return orb.Point{lon, lat}, err
}

// maxProjectBytes is the largest project file that is read; it is written by hand.
const maxProjectBytes = 4 << 20

// ReadProject reads a project file with its layers and tables. It goes on after an error, so that the findings hold every
// problem of every file that can be known; the project is nil when one of them is an error.
func ReadProject(ctx context.Context, path string) (*Project, Findings) {
	dir := filepath.Dir(path)
	return readProject(ctx, dir, filepath.Base(path), func(name string, limit int64) ([]byte, string) {
		return readFile(filepath.Join(dir, filepath.FromSlash(name)), limit)
	})
}

// readProject reads a project whose files come from fetch: the bytes of a file by its name in the project, or in words why it cannot
// be read.
func readProject(ctx context.Context, dir, file string, fetch func(name string, limit int64) ([]byte, string)) (*Project, Findings) {
	b := &builder{p: &Project{File: file, Dir: dir}, fetch: fetch, hashed: map[string]bool{}, names: map[string]string{}, broken: map[string]bool{}, kept: map[string][]placed{}}
	b.read(ctx)
	if b.findings.Err() != nil {
		return nil, b.findings
	}
	b.p.Assumptions = b.assumptions
	return b.p, b.findings
}

// builder carries the reading of one project.
type builder struct {
	reader
	p        *Project
	fetch    func(name string, limit int64) ([]byte, string)
	settings *settings
	hashed   map[string]bool
	stated   System // working plane where it is stated
	layers   map[string]*layerData
	tables   map[string]*tableData

	broken      map[string]bool // layers and tables that could not be read to the end: names may be missing through no fault of those who use them
	extentKnown bool
	tolerance   float64             // what counts as on the outline [m]
	names       map[string]string   // of edges, rivers, lakes and springs, which results tell apart by name
	kept        map[string][]placed // records of the features by kind, for findings later
	brief       *record             // [brief]
}

// layerData is one layer as read: its features in their own system, and in the plane.
type layerData struct {
	file     string
	system   System
	features []Feature
	plane    []orb.Geometry // nil where a feature cannot be projected
	swapped  bool           // longitude and latitude are exchanged: no place is known
}

// tableData is one table as read.
type tableData struct {
	file   string
	system System // of eastings and northings; zero: the working plane
	rows   []tableRow
}

// read runs the stages; each works on what the ones before could make out.
func (b *builder) read(ctx context.Context) {
	data, ok := b.file(b.p.File, "", maxProjectBytes)
	if !ok {
		return
	}
	s, problem := parseSettings(b.p.File, data)
	if problem != nil {
		b.fail(*problem)
		return
	}
	b.settings = s
	b.readSettings()
	for _, stage := range []func(){b.readLayers, b.readTables, b.choosePlane, b.buildExtent, b.buildProperties, b.buildEdges, b.buildZones, b.buildRivers, b.buildLakes,
		b.buildSprings, b.buildWells, b.buildReceptors, b.buildStates, b.buildLimits, b.buildLicences, b.buildObservations, b.checkQuotas, b.checkSite} {
		if err := ctx.Err(); err != nil {
			b.fail(Finding{File: b.p.File, Found: "the reading was stopped: " + err.Error()})
			return
		}
		stage()
	}
}

// file reads a file relative to the project's directory and notes its hash.
func (b *builder) file(name, layer string, limit int64) ([]byte, bool) {
	data, problem := b.fetch(name, limit)
	if problem != "" {
		b.fail(Finding{File: name, Layer: layer, Found: problem, Hint: "paths count from the project file"})
		return nil, false
	}
	if !b.hashed[name] {
		b.hashed[name] = true
		sum := sha256.Sum256(data)
		b.p.Inputs = append(b.p.Inputs, plan.InputFile{File: name, SHA256: hex.EncodeToString(sum[:])})
	}
	return data, true
}

// readFile reads a plain file of limited size; problem says in words why it cannot.
func readFile(path string, limit int64) (data []byte, problem string) {
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, "no such file"
	case err != nil:
		return nil, "a file that cannot be read: " + plainError(err)
	case !info.Mode().IsRegular():
		return nil, "not a plain file"
	case info.Size() > limit:
		return nil, fmt.Sprintf("a file of %d bytes, more than the %d that are read", info.Size(), limit)
	}
	data, err = os.ReadFile(path)
	if err != nil {
		return nil, "a file that cannot be read: " + plainError(err)
	}
	return data, ""
}

// plainError leaves the path out of a file error: it is named already.
func plainError(err error) string {
	var pe *fs.PathError
	if errors.As(err, &pe) {
		return pe.Err.Error()
	}
	return err.Error()
}

// fileSpec is a layer's or a table's entry in the project file.
type fileSpec struct {
	name, file                string
	system                    System // zero: not stated
	sheet, delimiter, decimal string
	line                      int
}

// fileSpecs reads [layers] or [tables]: names or tables with settings, in the order of the section.
func (b *builder) fileSpecs(section *Section) []fileSpec {
	table := b.settings.table(&b.reader, section.Name)
	if table == nil {
		return nil
	}
	rec := b.settings.record(&b.reader, section, table, "["+section.Name+"]", nil, section.Name)
	var specs []fileSpec
	for _, f := range section.Fields {
		e := rec.find(f.Name, valueRole)
		if e == nil {
			continue
		}
		spec := fileSpec{name: f.Name, line: e.line}
		switch v := e.value.(type) {
		case string:
			spec.file = v
		case map[string]any:
			if !b.fileSettings(&spec, section, v) {
				continue
			}
		default:
			rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(v), Allowed: `a file name, or {file = "...", crs = "EPSG:..."}`})
			continue
		}
		spec.file = filepath.ToSlash(filepath.Clean(spec.file))
		if filepath.IsAbs(spec.file) || strings.Contains(spec.file, `:\`) {
			rec.fail(Finding{Property: e.key, Line: e.line, Found: quoted(spec.file), Allowed: "a path relative to the project file"})
			continue
		}
		specs = append(specs, spec)
	}
	for _, f := range section.Fields {
		if rec.has(f.Name) && !slices.ContainsFunc(specs, func(s fileSpec) bool { return s.name == f.Name }) {
			b.broken[f.Name] = true
		}
	}
	return specs
}

// fileSettings reads the table form of a file's entry.
func (b *builder) fileSettings(spec *fileSpec, section *Section, table map[string]any) bool {
	rec := b.settings.record(&b.reader, &fileSection, table, "["+section.Name+"] "+spec.name, nil, section.Name, spec.name)
	spec.file, spec.sheet, spec.delimiter = rec.text("file"), rec.text("sheet"), rec.text("delimiter")
	if e := rec.find("delimiter", valueRole); e != nil {
		if raw, ok := e.value.(string); ok {
			spec.delimiter = raw
		}
	}
	if i := rec.word("decimal", -1); i >= 0 {
		spec.decimal = fileSection.field("decimal").Words[i]
	}
	if section == &layersSection {
		for _, key := range []string{"sheet", "delimiter", "decimal"} {
			if rec.has(key) {
				rec.fail(Finding{Property: key, Line: rec.find(key, valueRole).line, Found: "a setting for tables", Hint: "leave it out of a layer"})
			}
		}
	}
	if code := rec.text("crs"); code != "" {
		s, err := ParseEPSG(code)
		if err != nil {
			rec.fail(Finding{Property: "crs", Line: rec.find("crs", valueRole).line, Found: quoted(code) + ", no system that is known", Allowed: OfferedSystems()})
			return false
		}
		spec.system = s
	}
	return spec.file != ""
}

// readLayers reads all layers.
func (b *builder) readLayers() {
	b.layers = map[string]*layerData{}
	if b.settings.table(&b.reader, "layers") == nil {
		b.fail(Finding{File: b.p.File, Property: "[layers]", Found: "missing", Allowed: "at least extent", Hint: layersSection.Fields[0].Example})
	}
	for _, spec := range b.fileSpecs(&layersSection) {
		data, ok := b.file(spec.file, spec.name, DefaultMaxLayerBytes)
		if !ok {
			b.broken[spec.name] = true
			continue
		}
		opt := LayerOptions{Layer: spec.name}
		if spec.system.Valid() {
			opt.EPSG, opt.Projected = spec.system.String(), !spec.system.Geographic()
		}
		layer, findings := ReadLayer(spec.file, data, opt)
		b.findings = append(b.findings, findings...)
		b.broken[spec.name] = findings.Err() != nil
		if len(layer.Features) == 0 && len(findings) == 0 {
			b.warn(Finding{File: spec.file, Layer: spec.name, Found: "a layer without features"})
		}
		system := spec.system
		if layer.CRS != "" {
			if s, err := ParseEPSG(layer.CRS); err == nil {
				system = s
			}
		}
		if !system.Valid() {
			system = WGS84
		}
		b.layers[spec.name] = &layerData{file: spec.file, system: system, features: layer.Features}
	}
}

// readTables reads all tables and resolves their columns.
func (b *builder) readTables() {
	b.tables = map[string]*tableData{}
	maps := b.columnMaps()
	for _, spec := range b.fileSpecs(&tablesSection) {
		data, ok := b.file(spec.file, spec.name, DefaultMaxTableBytes)
		if !ok {
			b.broken[spec.name] = true
			continue
		}
		grid, findings := ReadGrid(spec.file, data, TableOptions{Name: spec.name, Sheet: spec.sheet, Delimiter: spec.delimiter, Decimal: spec.decimal})
		b.findings = append(b.findings, findings...)
		if findings.Err() != nil || len(grid.Rows) == 0 {
			b.broken[spec.name] = true
		}
		if len(grid.Rows) == 0 && findings.Err() == nil {
			b.fail(Finding{File: spec.file, Layer: spec.name, Found: "an empty table", Allowed: "a row of headers and rows of values"})
		}
		rows := b.rows(grid, tableSections[spec.name], maps[spec.name], b.p.File)
		b.tables[spec.name] = &tableData{file: spec.file, system: spec.system, rows: rows}
	}
}

// tableSections are the sections that the tables' columns belong to.
var tableSections = map[string]*Section{"limits": &limitsSection, "licences": &licencesSection, "states": &statesSection, "wells": &wellsSection,
	"receptors": &receptorsSection, "observations": &observationsSection}
