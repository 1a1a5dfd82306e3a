package gisio_test

import (
	"fmt"

	"springbound/gisio"
)

func ExampleSystem_Forward() {
	zone, err := gisio.UTMFor(-1.5, 52.25)
	if err != nil {
		fmt.Println(err)
		return
	}
	x, y, err := zone.Forward(-1.5, 52.25)
	scale, _ := zone.ScaleFactor(-1.5, 52.25)
	fmt.Println(zone, zone.Name(), err)
	fmt.Printf("%.3f m east, %.3f m north, scale %.6f\n", x, y, scale)
	// Output:
	// EPSG:32630 WGS 84 / UTM zone 30N <nil>
	// 602398.276 m east, 5789904.456 m north, scale 0.999729
}

func ExampleParseEPSG() {
	_, err := gisio.ParseEPSG("EPSG:3857")
	fmt.Println(err)
	// Output:
	// coordinate system "EPSG:3857": this code is not offered; project the data to one that is; offered are the EPSG codes longitude and latitude 4326 (WGS 84), 4258 (ETRS89), 4269 (NAD83), 4283 (GDA94), 7844 (GDA2020); metres 32601-32660 (WGS 84 / UTM north), 32701-32760 (WGS 84 / UTM south), 25828-25838 (ETRS89 / UTM), 26901-26923 (NAD83 / UTM), 28348-28358 (GDA94 / MGA), 7846-7859 (GDA2020 / MGA)
}
