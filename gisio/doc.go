// Package gisio brings files in and out: GeoJSON layers, CSV and XLSX tables, the project file, coordinates and contours.
//
// Question answered: what does the user's project say, in metres and days on one plane, and what is wrong with it?
//
// Equations. Longitude and latitude go to the plane by the transverse Mercator projection (Krüger 1912; Karney 2011). A value in a unit
// is value x factor in the inside unit; every factor follows exactly from its definition (foot 0.3048 m, US gallon 3.785411784 L,
// imperial gallon 4.54609 L, acre-foot 43560 cubic feet, year 365.25 d) and is rounded once.
//
// Method. Features, rows and tables of the project file all become records whose keys are looked up in one list of sections and fields.
// That list also makes the reference page, so that reader and page cannot drift apart. Reading goes on after an error: the
// findings hold every problem of every file, with file, place, value found, value allowed and what to do. Nothing is mended silently.
// Suspicions (feet taken for metres, litres per second for cubic metres per day, one water entered twice) are warnings.
//
// Symbols, units, signs: inside, everything is metre and day; a blank is a nil pointer, never zero; pumping is positive.
//
// Assumptions and what is not done: no datum shift, no correction for the plane's scale, no vertical transformation; levels are taken
// as they are stated in the project's vertical datum. Whether some boundary fixes the head is for package aquifer to say.
//
// Sources: RFC 7946 (GeoJSON), RFC 4180 (CSV), TOML 1.0; projections as in the files that hold them; edit distance after
// Damerau (1964); well loss and step tests Jacob (1947).
package gisio
