package gisio

// sections is the one list of everything that may be written, in the order of the reference page.
var sections = []*Section{&projectSection, &coordinatesSection, &layersSection, &tablesSection, &fileSection, &aquiferSection, &meshSection, &briefSection,
	&quotaSection, &togetherSection, &excludeSection, &reportSection, &extentSection, &edgesSection, &zonesSection, &riversSection, &lakesSection, &springsSection, &wellsSection, &receptorsSection,
	&observationsSection, &limitsSection, &licencesSection, &statesSection, &ratesSection}

var projectSection = Section{Name: "project", Title: "Top of the project file", About: "Before the first table.", Fields: []Field{
	{Name: "title", Class: Text, Required: "yes", Meaning: "heading of every result", Example: `title = "Marram Head wellfield"`},
}}

var coordinatesSection = Section{Name: "coordinates", Title: "[coordinates]", About: "Where places and levels count from.", Fields: []Field{
	{Name: "working", Class: Text, Meaning: "EPSG code of the plane that everything is computed in; left out: that of the extent's layer where it is in metres, else the UTM zone of the extent",
		Example: `working = "EPSG:32630"`},
	{Name: "vertical_datum", Class: Text, Required: "yes", Meaning: "what every elevation counts from", Example: `vertical_datum = "mean sea level, Marram gauge"`},
}}

var layersSection = Section{Name: "layers", Title: "[layers]", About: "GeoJSON files in longitude and latitude (RFC 7946), or in a stated code: `wells = {file = \"wells.geojson\", crs = \"EPSG:32630\"}`.",
	Fields: []Field{
		{Name: "extent", Class: FileName, Required: "yes", Meaning: "one polygon: the aquifer's outline; holes are impermeable", Example: `extent = "extent.geojson"`},
		{Name: "edges", Class: FileName, Meaning: "lines along the outline that carry a condition; the rest of the outline lets nothing through", Example: `edges = "edges.geojson"`},
		{Name: "zones", Class: FileName, Meaning: "polygons with their own properties", Example: `zones = "zones.geojson"`},
		{Name: "rivers", Class: FileName, Meaning: "lines that exchange water", Example: `rivers = "rivers.geojson"`},
		{Name: "lakes", Class: FileName, Meaning: "polygons that exchange water", Example: `lakes = "lakes.geojson"`},
		{Name: "springs", Class: FileName, Meaning: "points where water leaves", Example: `springs = "springs.geojson"`},
		{Name: "wells", Class: FileName, Required: "yes, here or in [tables]", Meaning: "points that pump or recharge", Example: `wells = "wells.geojson"`},
		{Name: "receptors", Class: FileName, Meaning: "what must be protected: points, polygons or lines", Example: `receptors = "receptors.geojson"`},
		{Name: "observations", Class: FileName, Meaning: "measured levels and flows", Example: `observations = "observations.geojson"`},
	}}

var tablesSection = Section{Name: "tables", Title: "[tables]", About: "CSV or XLSX files, one row a record.", Fields: []Field{
	{Name: "limits", Class: FileName, Meaning: "bounds on the receptors", Example: `limits = "limits.csv"`},
	{Name: "licences", Class: FileName, Meaning: "licences and their quantities", Example: `licences = "licences.csv"`},
	{Name: "states", Class: FileName, Meaning: "operating states", Example: `states = {file = "tables.xlsx", sheet = "states"}`},
	{Name: "wells", Class: FileName, Meaning: "wells with their places, or further attributes of the layer's wells by id", Example: `wells = "wells.csv"`},
	{Name: "receptors", Class: FileName, Meaning: "likewise for receptors", Example: `receptors = "receptors.csv"`},
	{Name: "observations", Class: FileName, Meaning: "measured levels and flows", Example: `observations = "observations.csv"`},
}}

var fileSection = Section{Name: "file", Title: "A file with settings", About: "What a table of the form `{file = ...}` may hold. Under `[columns.wells]` (or another table's name) a field is tied to a header: " +
	"`max = \"Max yield [L/s]\"` or `max = {header = \"Max yield\", unit = \"L/s\"}`.", Fields: []Field{
	{Name: "file", Class: Text, Required: "yes", Meaning: "path relative to the project file", Example: `file = "wells.csv"`},
	{Name: "crs", Class: Text, Meaning: "EPSG code of the coordinates in the file", Example: `crs = "EPSG:32630"`},
	{Name: "sheet", Class: Text, Meaning: "sheet of an XLSX file; left out: the sheet with the table's name, or the only one", Example: `sheet = "limits"`},
	{Name: "delimiter", Class: Text, Meaning: "what parts the columns of a CSV file; left out: found from the headers", Example: `delimiter = ";"`},
	{Name: "decimal", Class: Word, Words: []string{".", ","}, Meaning: "decimal mark of a CSV file; left out: found from the numbers, an error where they leave it open", Example: `decimal = ","`},
}}

const fullRange = 1e300 // no usual bound on this side

// The properties that the aquifer as a whole and its zones share.
var propertyFields = []Field{
	{Name: "transmissivity", Class: Parameter, Kind: Transmissivity, Bound: "> 0", Usual: [2]float64{0.1, 50000}, UsualWhy: "is the unit right?",
		Meaning: "geometric mean of the two principal values where anisotropic", Example: `transmissivity = "420 m2/d"`},
	{Name: "conductivity", Class: Parameter, Kind: Conductivity, Bound: "> 0", Usual: [2]float64{1e-9, 1e4}, UsualWhy: "is the unit right?",
		Meaning: "in place of transmissivity, together with thickness", Example: `conductivity_m_per_d = 14`},
	{Name: "thickness", Class: Parameter, Kind: Length, Bound: "> 0", Usual: [2]float64{0.1, 3000}, UsualWhy: "is the unit right?",
		Meaning: "of the aquifer", Example: `thickness_m = 30`},
	{Name: "anisotropy_ratio", Class: Number, Kind: Plain, Bound: ">= 1", Meaning: "transmissivity along the major axis over that along the minor axis", Example: `anisotropy_ratio = 4`},
	{Name: "anisotropy_angle_deg", Class: Number, Kind: Plain, Required: "with anisotropy_ratio", Meaning: "direction of the major axis, counter-clockwise from grid east, in degrees",
		Example: `anisotropy_angle_deg = 30`},
	{Name: "recharge", Class: Parameter, Kind: DepthRate, Usual: [2]float64{-0.01, 0.01}, UsualWhy: "more than 10 mm a day is unusual: is the unit right?", Meaning: "from above, independent of the head",
		Example: `recharge = "0.25 mm/d"`},
	{Name: "leakage_resistance", Class: Parameter, Kind: Resistance, Bound: "> 0", Meaning: "confining layer's thickness over its vertical conductivity; needs source_head",
		Example: `leakage_resistance = "4000 d"`},
	{Name: "confining_thickness", Class: Parameter, Kind: Length, Bound: "> 0", Meaning: "in place of leakage_resistance, together with confining_vertical_conductivity", Example: `confining_thickness_m = 8`},
	{Name: "confining_vertical_conductivity", Class: Parameter, Kind: Conductivity, Bound: "> 0", Meaning: "of the confining layer", Example: `confining_vertical_conductivity = "0.002 m/d"`},
	{Name: "source_head", Class: Level, Kind: Length, Required: "with leakage", Meaning: "level that leakage comes from", Example: `source_head_m = 31.5`},
	{Name: "top", Class: Level, Kind: Length, Meaning: "top of the aquifer; left out: the confined condition is not checked", Example: `top_m = -4`},
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `ground_level_m = 36`},
	{Name: "storage", Class: Parameter, Kind: Plain, Bound: "> 0", Usual: [2]float64{1e-6, 0.35}, UsualWhy: "is this a storage coefficient?", Meaning: "storage coefficient; only for an estimate of time", Example: `storage = 2e-4`},
}

var aquiferSection = Section{Name: "aquifer", Title: "[aquifer]", About: "What holds where no zone says otherwise. Transmissivity is needed, directly or as conductivity and thickness.", Fields: append(propertyFields[:len(propertyFields):len(propertyFields)],
	Field{Name: "source", Class: Text, Meaning: "where the values come from, where a value has no source of its own", Example: `source = "pumping tests of 2019"`})}

var meshSection = Section{Name: "mesh", Title: "[mesh]", About: "All may be left out.", Fields: []Field{
	{Name: "nodes", Class: Whole, Bound: "> 0", Meaning: "how many nodes to aim at", Example: `nodes = 20000`},
	{Name: "finest", Class: Number, Kind: Length, Bound: "> 0", Meaning: "smallest spacing of nodes, at wells", Example: `finest = "1 m"`},
	{Name: "growth", Class: Number, Kind: Plain, Bound: "> 0", Meaning: "growth of the spacing per distance", Example: `growth = 0.15`},
	{Name: "accuracy", Class: Number, Kind: Share, Bound: "> 0", Meaning: "estimated relative error of every receptor's change down to which the mesh is refined; left out: 0.5 %, and a mesh fixed by nodes or finest is left as it is", Example: `accuracy = "1 %"`},
}}

var briefSection = Section{Name: "brief", Title: "[brief]", About: "What the plan is asked for.", Fields: []Field{
	{Name: "aim", Class: Word, Words: []string{"most-yield", "most-headroom", "least-energy", "closest-to-requests"}, Required: "yes", Meaning: "most-yield: largest total rate; most-headroom: largest smallest headroom for the demand; least-energy: least pumping energy for the demand, needs pump_efficiency and delivery_level of each decided well; closest-to-requests: least sum of squared differences from the requested rates, each as a share of the well's largest rate, needs requested of each decided well", Example: `aim = "most-yield"`},
	{Name: "demand", Class: Number, Kind: Rate, Bound: ">= 0", Required: "with most-headroom, least-energy, unless the states have it", Meaning: "total that the decided wells must give in the default state, unless the table of states says it", Example: `demand = "60 L/s"`},
	{Name: "at_most_running", Class: Whole, Bound: ">= 0", Meaning: "how many of the decided wells may pump at once; left out: any number", Example: `at_most_running = 4`},
}}

var quotaSection = Section{Name: "quota", Title: "[[brief.quota]]", About: "Any number of them.", Fields: []Field{
	{Name: "name", Class: Text, Required: "yes", Meaning: "shown in the results", Example: `name = "northern group"`},
	{Name: "wells", Class: IDList, Required: "yes", Meaning: "ids of its wells", Example: `wells = ["W1", "W2"]`},
	{Name: "per_hour", Class: Number, Kind: HourVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in an hour", Example: `per_hour = "200 m3"`},
	{Name: "per_day", Class: Number, Kind: DayVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in a day", Example: `per_day = "4000 m3"`},
	{Name: "per_year", Class: Number, Kind: YearVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in a year", Example: `per_year = "1.2 Mm3"`},
	{Name: "start_day", Class: Text, Meaning: "first day of the quota's year, as MM-DD", Example: `start_day = "06-01"`},
	{Name: "months", Class: Text, Meaning: "months in which it holds, as a list or a range; it then holds in the operating states that cover one of them; left out: the whole year", Example: `months = "5-9"`},
	{Name: "source", Class: Text, Meaning: "where the quota comes from", Example: `source = "group agreement of 2021"`},
}}

var togetherSection = Section{Name: "together", Title: "[[brief.together]]", About: "Wells that run together or not at all; any number of groups. Each decided one needs a least rate.", Fields: []Field{
	{Name: "wells", Class: IDList, Required: "yes", Meaning: "ids of two wells or more", Example: `wells = ["W1", "W2"]`},
	{Name: "source", Class: Text, Meaning: "where the rule comes from", Example: `source = "one power supply"`},
}}

var excludeSection = Section{Name: "exclude", Title: "[[brief.exclude]]", About: "Wells of which at most one runs; any number of groups.", Fields: []Field{
	{Name: "wells", Class: IDList, Required: "yes", Meaning: "ids of two wells or more", Example: `wells = ["W3", "W4"]`},
	{Name: "source", Class: Text, Meaning: "where the rule comes from", Example: `source = "W4 stands by for W3"`},
}}

var reportSection = Section{Name: "report", Title: "[report]", About: "All may be left out.", Fields: []Field{
	{Name: "prepared_for", Class: Text, Meaning: "whom the plan is for", Example: `prepared_for = "Marram Water"`},
	{Name: "prepared_by", Class: Text, Meaning: "who made it", Example: `prepared_by = "A. Person"`},
	{Name: "reference", Class: Text, Meaning: "file number", Example: `reference = "MW-114"`},
	{Name: "units", Class: Word, Words: rateUnitNames(), Meaning: "unit in which rates are shown", Example: `units = "L/s"`},
}}

// rateUnitNames lists the units of rate.
func rateUnitNames() []string { return unitNameList(Rate) }
