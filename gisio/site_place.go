package gisio

import (
	"fmt"
	"strings"

	"github.com/paulmach/orb"
)

// outlineShare is how far an edge may lie off the outline, as a share of the extent's diagonal: digitising the same line twice
// agrees to that, and a line on the wrong side of anything does not.
const outlineShare = 1e-3

// choosePlane settles the working plane: the stated one, that of the extent's layer where it is in metres, or the UTM zone of the
// extent. Then every layer is brought into it.
func (b *builder) choosePlane() {
	b.checkSwapped()
	switch extent := b.layers["extent"]; {
	case b.stated.Valid():
		b.p.Plane = b.stated
		b.p.PlaneNote = fmt.Sprintf("%v (%s), stated in the project file", b.stated, b.stated.Name())
	case extent == nil || len(extent.features) == 0 || extent.swapped:
	case !extent.system.Geographic():
		b.p.Plane = extent.system
		b.p.PlaneNote = fmt.Sprintf("%v (%s), that of the extent's layer", extent.system, extent.system.Name())
	default:
		plane, note, err := UTMForExtent(extent.features[0].Geometry.Bound())
		if err != nil {
			b.fail(Finding{File: extent.file, Layer: "extent", Found: "an extent without a UTM zone: " + err.Error(), Hint: "check the coordinates, or state working under [coordinates]"})
			break
		}
		b.p.Plane, b.p.PlaneNote = plane, strings.TrimPrefix(note, "the plane is ")
	}
	if !b.p.Plane.Valid() {
		return
	}
	for _, f := range layersSection.Fields {
		layer := b.layers[f.Name]
		if layer == nil || layer.swapped {
			continue
		}
		if note := DatumNote(layer.system, b.p.Plane); note != "" && len(layer.features) > 0 {
			b.warn(Finding{File: layer.file, Layer: f.Name, Found: "another datum than the plane's", Hint: note})
		}
		for i, feature := range layer.features {
			g, err := Transform(layer.system, b.p.Plane, feature.Geometry)
			if err != nil {
				b.fail(Finding{File: layer.file, Layer: f.Name, Feature: feature.Name(), Line: feature.Line, Found: err.Error(), Hint: "check the coordinates, or state the layer's crs"})
				continue
			}
			if layer.system != b.p.Plane && !b.validOnPlane(layer, f.Name, feature, g) {
				continue
			}
			layer.plane[i] = g
		}
	}
}

// validOnPlane checks a projected shape again, since straight edges are other lines on the plane than in degrees. What the layer
// reader warned of is not repeated.
func (b *builder) validOnPlane(layer *layerData, name string, feature Feature, g orb.Geometry) bool {
	ok := true
	for _, f := range CheckShape(g).Errors() {
		ok = false
		f.File, f.Layer, f.Feature, f.Line = layer.file, name, feature.Name(), feature.Line
		f.Hint = strings.TrimPrefix(f.Hint+"; found on the plane "+b.p.Plane.String()+", not in the layer's own system", "; ")
		b.fail(f)
	}
	return ok
}

// checkSwapped looks for layers in degrees that lie off the extent but on it once longitude and latitude are exchanged, and for an
// extent of which that holds against all the others.
func (b *builder) checkSwapped() {
	extent := b.layers["extent"]
	for _, f := range layersSection.Fields {
		if l := b.layers[f.Name]; l != nil {
			l.plane = make([]orb.Geometry, len(l.features))
		}
	}
	if extent == nil || len(extent.features) == 0 || !extent.system.Geographic() {
		return
	}
	box := extent.features[0].Geometry.Bound()
	mirrored := orb.Bound{Min: exchange(box.Min), Max: exchange(box.Max)}
	var swapped []*layerData
	var names []string
	all := true
	for _, f := range layersSection.Fields[1:] {
		l := b.layers[f.Name]
		if l == nil || len(l.features) == 0 || !l.system.Geographic() {
			continue
		}
		outside, fits := 0, 0
		for _, feature := range l.features {
			fb := feature.Geometry.Bound()
			if !fb.Intersects(box) {
				outside++
				if fb.Intersects(mirrored) {
					fits++
				}
			}
		}
		if outside == len(l.features) && fits == outside {
			swapped, names = append(swapped, l), append(names, f.Name)
		} else {
			all = false
		}
	}
	if len(swapped) > 1 && all {
		extent.swapped = true
		b.fail(Finding{File: extent.file, Layer: "extent", Found: "an extent that meets no other layer, but all of them with longitude and latitude exchanged", Allowed: "longitude first, then latitude",
			Hint: "exchange the two"})
		return
	}
	for i, l := range swapped {
		l.swapped = true
		b.fail(Finding{File: l.file, Layer: names[i], Found: "coordinates off the extent that would lie on it with longitude and latitude exchanged", Allowed: "longitude first, then latitude",
			Hint: "exchange the two"})
	}
}

// exchange swaps a point's coordinates.
func exchange(p orb.Point) orb.Point { return orb.Point{p[1], p[0]} }
