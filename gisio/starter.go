package gisio

import (
	"embed"
	"fmt"
)

//go:embed starter
var starterFiles embed.FS

// StarterFile is one file of the starter project.
type StarterFile struct {
	Name string
	Data []byte
}

// starterNames is the order in which the files are written, the project file first.
var starterNames = []string{"project.toml", "extent.geojson", "edges.geojson", "zones.geojson", "rivers.geojson", "springs.geojson", "receptors.geojson",
	"wells.csv", "limits.csv", "licences.csv", "states.csv", "observations.csv"}

// StarterFiles returns a commented project of an invented site that can be read and planned as it stands, always in the same order.
func StarterFiles() []StarterFile {
	files := make([]StarterFile, len(starterNames))
	for i, name := range starterNames {
		data, err := starterFiles.ReadFile("starter/" + name)
		if err != nil {
			panic(fmt.Sprintf("gisio: %v", err))
		}
		files[i] = StarterFile{name, data}
	}
	return files
}
