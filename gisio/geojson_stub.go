package gisio

// ReadLayer: see geojson.go.
func ReadLayer(file string, data []byte, opt LayerOptions) (Layer, Findings) {
	panic("not written yet")
}
