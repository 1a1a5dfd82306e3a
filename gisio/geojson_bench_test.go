package gisio

import (
	"os"
	"testing"
)

func BenchmarkReadLayer(b *testing.B) {
	data, err := os.ReadFile(sharedData(b, "polygons", "coast-baffin-10m-stress.geojson"))
	if err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, findings := ReadLayer("coast", data, LayerOptions{}); findings.Err() != nil {
			b.Fatal(findings.Err())
		}
	}
}
