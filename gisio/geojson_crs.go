package gisio

import (
	"fmt"
	"strings"
)

// systemPrefixes are the ways in which the old "crs" member writes an EPSG code, before the code itself.
var systemPrefixes = []string{
	"EPSG:", "urn:ogc:def:crs:EPSG:", "urn:x-ogc:def:crs:EPSG:",
	"http://www.opengis.net/def/crs/EPSG/", "https://www.opengis.net/def/crs/EPSG/",
}

// longitudeLatitudeNames are the names of WGS 84 in the order longitude, latitude.
var longitudeLatitudeNames = []string{
	"urn:ogc:def:crs:OGC:1.3:CRS84", "urn:ogc:def:crs:OGC::CRS84", "OGC:CRS84", "CRS84",
	"http://www.opengis.net/def/crs/OGC/1.3/CRS84", "https://www.opengis.net/def/crs/OGC/1.3/CRS84",
}

// crsCode gives the code "EPSG:n" that a crs name stands for, or "". A version between prefix and code is skipped.
func crsCode(name string) string {
	for _, known := range longitudeLatitudeNames {
		if strings.EqualFold(known, name) {
			return WGS84.String()
		}
	}
	for _, prefix := range systemPrefixes {
		if len(name) <= len(prefix) || !strings.EqualFold(name[:len(prefix)], prefix) {
			continue
		}
		code := name[len(prefix):]
		if i := strings.LastIndexAny(code, ":/"); i >= 0 && prefix != "EPSG:" {
			code = code[i+1:]
		}
		if code != "" && len(code) <= 6 && strings.Trim(code, "0123456789") == "" {
			return "EPSG:" + strings.TrimLeft(code, "0")
		}
	}
	return ""
}

const crsHint = `state the EPSG code of the layer in the project file, or save the layer in longitude and latitude (EPSG:4326)`

// crsName gives the name that a "crs" member holds, whether of type "name" or of the still older type "EPSG".
func crsName(v *jsonValue) (string, bool) {
	t, p := v.member("type"), v.member("properties")
	if t == nil || t.kind != jsonString {
		return "", false
	}
	switch t.text {
	case "name":
		if n := p.member("name"); n != nil && n.kind == jsonString {
			return n.text, true
		}
	case "EPSG":
		if n := p.member("code"); n != nil && (n.kind == jsonNumber || n.kind == jsonString) {
			return "EPSG:" + n.text, true
		}
	}
	return "", false
}

// readCRS reads the "crs" member of the outermost object, which RFC 7946 took out of the format and which many
// programs still write. It is accepted where it agrees with the code stated by the user, or names an offered system
// where none is stated; otherwise the whole layer is refused, since its numbers cannot be understood.
func (r *layerReader) readCRS(root *jsonValue) bool {
	v := root.member("crs")
	if v == nil {
		return true
	}
	at := int(v.offset)
	const property = `member "crs"`
	if v.kind == jsonNull {
		if r.opt.EPSG != "" {
			return true
		}
		r.add(Error, at, property, "null: the coordinates have no known system", "a known system, or no such member", crsHint)
		return false
	}
	name, ok := crsName(v)
	if !ok {
		r.add(Error, at, property, "not of a kind that can be read", `a name such as "urn:ogc:def:crs:EPSG::32630"`, crsHint)
		return false
	}
	code := crsCode(name)
	found := fmt.Sprintf("the system %q", shorten(name))
	if code == "" {
		r.add(Error, at, property, found, "an EPSG code or CRS84", crsHint)
		return false
	}
	if stated := strings.ToUpper(strings.TrimSpace(r.opt.EPSG)); stated != "" {
		if stated != code {
			r.add(Error, at, property, found, "the code stated for this layer, "+stated, "state the right code, or remove the member if it is wrong")
			return false
		}
		r.crs = code
		return true
	}
	system, err := ParseEPSG(code)
	if err != nil {
		r.add(Error, at, property, found, "one of the EPSG codes "+OfferedSystems(), "project the layer to one of them")
		return false
	}
	if r.opt.Projected && system.Geographic() {
		r.add(Error, at, property, found, "a system in metres, as stated for this layer", "state the right code, or remove the member if it is wrong")
		return false
	}
	r.crs = code
	r.projected = !system.Geographic()
	return true
}

// nestedCRS reads a "crs" member of a single feature or geometry: it may only repeat that of the layer.
func (r *layerReader) nestedCRS(v *jsonValue) {
	want := r.crs
	if want == "" {
		want = strings.ToUpper(strings.TrimSpace(r.opt.EPSG))
	}
	if want == "" && !r.projected {
		want = WGS84.String()
	}
	if name, ok := crsName(v); ok && crsCode(name) == want {
		return
	}
	r.add(Error, int(v.offset), `member "crs"`, "a coordinate system of this feature alone", "the one of the layer, "+want,
		"put features of another system into a layer of their own")
}
