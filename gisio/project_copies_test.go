package gisio

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"math"
	"reflect"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// copyTolerance is how far two copies of a site in different units may differ, relative to the value: a value is written in 17 digits
// and converted by a factor rounded once, so that the error is a few units in the last place.
const copyTolerance = 1e-12

// differ lists where two values differ, floats by more than the tolerance.
func differ(path string, a, b reflect.Value) []string {
	switch a.Kind() {
	case reflect.Float64:
		x, y := a.Float(), b.Float()
		if !(math.Abs(x-y) <= copyTolerance*math.Max(math.Abs(x), math.Abs(y))) && x != y {
			return []string{fmt.Sprintf("%s: %v and %v", path, x, y)}
		}
		return nil
	case reflect.Pointer, reflect.Interface:
		if a.IsNil() || b.IsNil() {
			if a.IsNil() != b.IsNil() {
				return []string{path + ": one is not known"}
			}
			return nil
		}
		return differ(path, a.Elem(), b.Elem())
	case reflect.Struct:
		var out []string
		for i := range a.NumField() {
			out = append(out, differ(path+"."+a.Type().Field(i).Name, a.Field(i), b.Field(i))...)
		}
		return out
	case reflect.Slice, reflect.Array:
		if a.Len() != b.Len() {
			return []string{fmt.Sprintf("%s: %d and %d items", path, a.Len(), b.Len())}
		}
		var out []string
		for i := range a.Len() {
			out = append(out, differ(fmt.Sprintf("%s[%d]", path, i), a.Index(i), b.Index(i))...)
		}
		return out
	}
	if !a.Equal(b) {
		return []string{fmt.Sprintf("%s: %v and %v", path, a, b)}
	}
	return nil
}

// sameProject compares everything that is computed with.
func sameProject(t *testing.T, copied files, compareEntered bool) {
	t.Helper()
	want, findings := apply(t).read()
	if findings.Err() != nil {
		t.Fatal(findings.Err())
	}
	got, findings := copied.read()
	if len(findings) > 0 {
		t.Fatalf("the copy gives\n%s", findingLines(findings))
	}
	for _, p := range []*Project{want, got} {
		p.Inputs, p.Assumptions = nil, nil
		for i := range p.Limits {
			if !compareEntered {
				p.Limits[i].Entered = ""
			}
		}
	}
	for i, d := range differ("Project", reflect.ValueOf(*want), reflect.ValueOf(*got)) {
		if i < 20 {
			t.Error(d)
		}
	}
}

// table returns the cells of a starter table without its comments.
func table(t *testing.T, all files, name string) [][]string {
	t.Helper()
	r := csv.NewReader(strings.NewReader(all[name]))
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

var starterTables = []string{"wells", "limits", "licences", "states", "observations"}

func TestDecimalCommaSheetIsTheSameSite(t *testing.T) {
	all := apply(t, edit{"project.toml", "# [columns.wells]", "[columns.wells]\nmax = {header = \"Tested yield\", unit = \"m3/d\"}\nid = \"Bore no.\""})
	number := regexp.MustCompile(`^-?[0-9]*\.[0-9]+`)
	for _, name := range starterTables {
		var b strings.Builder
		b.WriteString("\ufeffSheet of the waterworks;;\r\n;\r\n") // a title above the headers, a blank line, a byte order mark
		for i, row := range table(t, all, name+".csv") {
			for j, c := range row {
				if number.MatchString(c) && !strings.HasSuffix(c, "intake") {
					c = strings.Replace(c, ".", ",", 1)
				}
				if name == "wells" && i == 0 && c == "max" {
					c = "Tested  yield"
				}
				if name == "wells" && i == 0 && c == "id" {
					c = "bore no."
				}
				if name == "wells" && i == 1 && c != "" {
					c = "[" + c + "]"
				}
				if c == "1600" {
					c = "1.600,0"
				}
				if j > 0 {
					b.WriteByte(';')
				}
				if strings.ContainsAny(c, ";\"") {
					c = `"` + c + `"`
				}
				b.WriteString(c)
			}
			b.WriteString("\r\n")
		}
		all[name+".csv"] = b.String()
	}
	sameProject(t, all, false)
}

func TestWorkbookIsTheSameSite(t *testing.T) {
	all := apply(t)
	f := excelize.NewFile()
	for _, name := range starterTables {
		if _, err := f.NewSheet(name); err != nil {
			t.Fatal(err)
		}
		for i, row := range table(t, all, name+".csv") {
			for j, c := range row {
				cell, err := excelize.CoordinatesToCellName(j+1, i+1)
				if err != nil {
					t.Fatal(err)
				}
				var value any = c
				if v, err := strconv.ParseFloat(c, 64); err == nil && (i+j)%3 != 0 { // a third of the numbers stays text
					value = v
				}
				if c == "" {
					continue
				}
				if err := f.SetCellValue(name, cell, value); err != nil {
					t.Fatal(err)
				}
			}
		}
		all["project.toml"] = strings.Replace(all["project.toml"], `"`+name+`.csv"`, `"tables.xlsx"`, 1)
		delete(all, name+".csv")
	}
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	all["tables.xlsx"] = b.String()
	sameProject(t, all, false)
}

// in writes a number of one unit in another, with all digits.
func in(t *testing.T, text, from, to string, kind Kind) string {
	t.Helper()
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	u, err := FindUnit(from, kind)
	if err != nil {
		t.Fatal(err)
	}
	w, err := FindUnit(to, kind)
	if err != nil {
		t.Fatal(err)
	}
	return strconv.FormatFloat(w.Out(u.In(v)), 'g', -1, 64)
}

// swap writes every "number unit" or key with a unit word of a text in another unit.
func swap(t *testing.T, text, from, to string, kind Kind) string {
	t.Helper()
	quotedValue := regexp.MustCompile(`(-?[0-9.]+) ` + regexp.QuoteMeta(from) + `(["\],;]|$)`)
	text = quotedValue.ReplaceAllStringFunc(text, func(s string) string {
		m := quotedValue.FindStringSubmatch(s)
		return in(t, m[1], from, to, kind) + " " + to + m[2]
	})
	u, _ := FindUnit(from, kind)
	w, _ := FindUnit(to, kind)
	keyed := regexp.MustCompile(`_` + u.Word + `": (\[[^\]]*\]|-?[0-9.]+)`)
	numberIn := regexp.MustCompile(`-?[0-9.]+`)
	return keyed.ReplaceAllStringFunc(text, func(s string) string {
		m := keyed.FindStringSubmatch(s)
		return "_" + w.Word + `": ` + numberIn.ReplaceAllStringFunc(m[1], func(n string) string { return in(t, n, from, to, kind) })
	})
}

func TestFeetAndGallonsAreTheSameSite(t *testing.T) {
	all := apply(t)
	all["project.toml"] = swap(t, swap(t, swap(t, all["project.toml"], "m2/d", "gpd_us/ft", Transmissivity), "mm/d", "in/yr", DepthRate), "m", "ft", Length)
	all["project.toml"] = swap(t, all["project.toml"], "m3", "acre_ft", DayVolume)
	all["edges.geojson"] = swap(t, all["edges.geojson"], "m", "ft", Length)
	all["zones.geojson"] = swap(t, all["zones.geojson"], "m2/d", "ft2/d", Transmissivity)
	all["rivers.geojson"] = swap(t, swap(t, all["rivers.geojson"], "m", "ft", Length), "d", "yr", Resistance)
	all["springs.geojson"] = swap(t, swap(t, all["springs.geojson"], "m", "in", Length), "m2/d", "gpm_us/ft", Conductance)
	all["limits.csv"] = strings.ReplaceAll(all["limits.csv"], "35 L/s", in(t, "35", "L/s", "gpm_us", Rate)+" gpm_us")
	for _, v := range []string{"0.9", "1.5"} {
		all["limits.csv"] = strings.ReplaceAll(all["limits.csv"], ","+v+" m,", ","+in(t, v, "m", "ft", Length)+" ft,")
	}
	all["licences.csv"] = strings.NewReplacer("350 m3", in(t, "350", "m3", "gpm_us", HourVolume)+" gpm_us", "6500 m3", in(t, "6500", "m3", "mgd_us", DayVolume)+" mgd_us",
		"2200 ML", in(t, "2200", "ML", "acre_ft", YearVolume)+" acre_ft").Replace(all["licences.csv"])
	observations := table(t, all, "observations.csv")
	observations[0][5], observations[0][6] = "level [ft]", "flow [gpm_us]"
	observations[1][5] = in(t, observations[1][5], "m", "ft", Length)
	observations[2][6] = in(t, observations[2][6], "L/s", "gpm_us", Rate)
	all["observations.csv"] = write(t, observations)
	wells := table(t, all, "wells.csv")
	to := map[string]string{"m": "ft", "mm": "in", "m3/d": "gpm_us", "d/m2": "ft/gpm_us", "d2/m5": "s2/ft5"}
	kinds := map[string]Kind{"m": Length, "mm": Length, "m3/d": Rate, "d/m2": LinearLoss, "d2/m5": QuadraticLoss}
	for j, unit := range wells[1] {
		for i := 2; i < len(wells); i++ {
			if unit != "" && wells[i][j] != "" {
				wells[i][j] = in(t, wells[i][j], unit, to[unit], kinds[unit])
			}
		}
		wells[1][j] = to[unit]
	}
	all["wells.csv"] = write(t, wells)
	sameProject(t, all, false)
}

// write makes a CSV text of cells.
func write(t *testing.T, rows [][]string) string {
	t.Helper()
	var b strings.Builder
	w := csv.NewWriter(&b)
	if err := w.WriteAll(rows); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestProjectedLayersAreTheSameSite(t *testing.T) {
	p, _ := apply(t).read()
	all := apply(t, edit{"project.toml", `springs = "springs.geojson"`, `springs = {file = "springs.geojson", crs = "EPSG:32625"}`})
	at := p.Site.Springs[0].At
	all["springs.geojson"] = strings.Replace(all["springs.geojson"], "[-30.513101, 47.044073]", fmt.Sprintf("[%v, %v]", at[0], at[1]), 1)
	q, findings := all.read()
	if len(findings) > 0 {
		t.Fatal(findingLines(findings))
	}
	const there = 1e-6 // metres: there and back by the projection's series, which is good to a micrometre
	if got := q.Site.Springs[0].At; math.Hypot(got[0]-at[0], got[1]-at[1]) > there {
		t.Errorf("spring at %v, want %v", got, at)
	}
}

func TestReadingTwiceGivesTheSame(t *testing.T) {
	p, f := apply(t).read()
	q, g := apply(t).read()
	if !reflect.DeepEqual(f, g) || !reflect.DeepEqual(p.Assumptions, q.Assumptions) || !reflect.DeepEqual(p.Inputs, q.Inputs) || !reflect.DeepEqual(p.Site, q.Site) {
		t.Error("two readings of the same files differ")
	}
}

// TestLayerWithTableIsTheSameSite puts the wells' places into a layer, by property or by the feature's own id, and leaves the rest to the
// table.
func TestLayerWithTableIsTheSameSite(t *testing.T) {
	all := apply(t, edit{"project.toml", "springs = ", "wells = \"wells.geojson\"\nsprings = "})
	rows := table(t, all, "wells.csv")
	var features []string
	for i, row := range rows {
		if i >= 2 {
			id := fmt.Sprintf(`"id": %q, "properties": {}`, row[0])
			if i%2 == 0 {
				id = fmt.Sprintf(`"properties": {"id": %q, "name": %q}`, row[0], row[1])
			}
			features = append(features, fmt.Sprintf(`{"type": "Feature", %s, "geometry": {"type": "Point", "coordinates": [%s, %s]}}`, id, row[2], row[3]))
		}
		rows[i] = append(append([]string{}, row[:2]...), row[4:]...)
	}
	all["wells.geojson"] = `{"type": "FeatureCollection", "features": [` + strings.Join(features, ",\n") + `]}`
	all["wells.csv"] = write(t, rows)
	sameProject(t, all, true)

	all["wells.csv"] = strings.Replace(all["wells.csv"], "W3,Field", "W33,Field", 1)
	_, findings := all.read()
	got := findingLines(findings)
	for _, want := range []string{`row 5 (id "W33"): id is "W33" without a place; no feature of the layer has this id`, `wells.geojson, line 3, layer wells, feature 3 (id "W3"): max is missing or blank`} {
		if !strings.Contains(got, want) {
			t.Errorf("no %q in\n%s", want, got)
		}
	}
}
