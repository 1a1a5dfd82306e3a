package gisio

import "fmt"

// feature reads one element of a FeatureCollection, or the one Feature of a text.
func (r *layerReader) feature(v *jsonValue, index int) {
	r.begin(v, index, "")
	kind, ok := r.typeOf(v, "the feature", `"Feature"`)
	if !ok {
		return
	}
	if kind != "Feature" {
		r.unknownType(v, kind, `"Feature"`)
		return
	}
	f := Feature{Index: index}
	f.ID = r.featureID(v)
	r.name = FeatureName(index, f.ID)
	r.forbidden(v, "coordinates", "geometries", "features")
	if crs := v.member("crs"); crs != nil && v != &r.json.root {
		r.nestedCRS(crs)
	}
	f.Properties, f.Keys = r.properties(v)
	g := v.member("geometry")
	switch {
	case g == nil:
		r.add(Error, int(v.offset), `member "geometry"`, "missing", "a geometry object", r.caseHint(v, "geometry"))
		return
	case g.kind == jsonNull:
		r.add(Error, int(g.offset), `member "geometry"`, "null: the feature has an empty geometry", "a geometry object", "draw the feature or remove it")
		return
	}
	if f.Geometry = r.geometry(g); f.Geometry != nil {
		r.keep(v, f)
	}
}

// featureID gives the "id" member as text: a text, or a number as written.
func (r *layerReader) featureID(v *jsonValue) string {
	id := v.member("id")
	switch {
	case id == nil:
		return ""
	case id.kind == jsonString, id.kind == jsonNumber:
		return id.text
	}
	r.add(Warning, int(id.offset), `member "id"`, id.describe(), "a text or a number", "it is ignored")
	return ""
}

func (r *layerReader) properties(v *jsonValue) (map[string]any, []string) {
	p := v.member("properties")
	switch {
	case p == nil:
		r.add(Warning, int(v.offset), `member "properties"`, "missing", "an object or null", "the feature is read without properties")
		return map[string]any{}, nil
	case p.kind == jsonNull:
		return map[string]any{}, nil
	case p.kind != jsonObject:
		r.add(Error, int(p.offset), `member "properties"`, p.describe(), "an object or null", "")
		return map[string]any{}, nil
	}
	values := make(map[string]any, len(p.items))
	keys := make([]string, 0, len(p.items))
	for i := range p.items {
		m := &p.items[i]
		if _, repeated := values[m.name]; !repeated {
			keys = append(keys, m.name)
		}
		values[m.name] = r.plain(m)
	}
	return values, keys
}

// plain gives a value as Go's own types.
func (r *layerReader) plain(v *jsonValue) any {
	switch v.kind {
	case jsonNull:
		return nil
	case jsonFalse:
		return false
	case jsonTrue:
		return true
	case jsonNumber:
		return v.number
	case jsonString:
		return v.text
	case jsonNumbers:
		numbers := r.json.elements(v)
		out := make([]any, len(numbers))
		for i, x := range numbers {
			out[i] = x
		}
		return out
	case jsonArray:
		out := make([]any, len(v.items))
		for i := range v.items {
			out[i] = r.plain(&v.items[i])
		}
		return out
	case jsonObject:
		out := make(map[string]any, len(v.items))
		for i := range v.items {
			out[v.items[i].name] = r.plain(&v.items[i])
		}
		return out
	}
	panic(fmt.Sprintf("gisio: JSON kind %d", v.kind))
}
