package gisio

import (
	"springbound/aquifer"
	"springbound/wells"
)

// commonFields may stand on every feature and row.
var commonFields = []Field{
	{Name: "source", Class: Text, Meaning: "where the record comes from", Example: `"source": "survey of 2018"`},
	{Name: "datum", Class: Text, Meaning: "must be the project's vertical_datum where it is stated", Example: `"datum": "mean sea level, Marram gauge"`},
	{Name: "note", Class: Text, Meaning: "free text, not used", Example: `"note": "culverted in part"`},
}

// placeFields are the columns that place a row of a table.
var placeFields = []Field{
	{Name: "longitude", Class: Number, Kind: Plain, Required: "in a table, or easting", Meaning: "degrees east, columns only", Example: `longitude`},
	{Name: "latitude", Class: Number, Kind: Plain, Required: "with longitude", Meaning: "degrees north, columns only", Example: `latitude`},
	{Name: "easting", Class: Number, Kind: Plain, Required: "in a table, or longitude", Meaning: "metres in the table's crs, or else the working plane; columns only", Example: `easting`},
	{Name: "northing", Class: Number, Kind: Plain, Required: "with easting", Meaning: "likewise", Example: `northing`},
}

// with appends fields to a list that stays as it is.
func with(fields []Field, more ...[]Field) []Field {
	out := append([]Field(nil), fields...)
	for _, m := range more {
		out = append(out, m...)
	}
	return out
}

var nameField = Field{Name: "name", Class: Text, Required: "yes", Meaning: "unique in the layer; edges, rivers, lakes and springs also among each other", Example: `"name": "Sandwater"`}

var availableField = Field{Name: "available_flow", Class: Number, Kind: Rate, Bound: ">= 0", Meaning: "most water that pumping can draw from it", Example: `"available_flow_L_per_s": 120`}

var bedFields = []Field{
	{Name: "bed_resistance", Class: Parameter, Kind: Resistance, Bound: "> 0", Required: "yes, or the two below", Meaning: "bed thickness over its vertical conductivity", Example: `"bed_resistance_d": 5`},
	{Name: "bed_thickness", Class: Parameter, Kind: Length, Bound: "> 0", Meaning: "in place of bed_resistance, together with bed_vertical_conductivity", Example: `"bed_thickness_m": 0.5`},
	{Name: "bed_vertical_conductivity", Class: Parameter, Kind: Conductivity, Bound: "> 0", Meaning: "of the bed", Example: `"bed_vertical_conductivity_m_per_d": 0.1`},
}

var extentSection = Section{Name: "extent", Title: "Layer extent", About: "One polygon.", Fields: with([]Field{
	{Name: "name", Class: Text, Meaning: "not used", Example: `"name": "Marram aquifer"`}}, commonFields)}

var edgesSection = Section{Name: "edges", Title: "Layer edges", About: "Lines along the outline or along a hole.", Fields: with([]Field{nameField,
	{Name: "kind", Class: Word, Words: edgeKindWords(), Required: "yes", Meaning: "the condition", Example: `"kind": "prescribed_head"`},
	{Name: "level", Class: Level, Kind: Length, Required: "one of level and levels, unless the flux is prescribed", Meaning: "level along the whole edge", Example: `"level_m": 12.4`},
	{Name: "levels", Class: Levels, Kind: Length, Meaning: "one level a vertex, linear between them", Example: `"levels_m": [12.4, 12.1, 11.8]`},
	{Name: "flux", Class: Number, Kind: LineFlux, Required: "for prescribed_flux", Meaning: "into the aquifer per length of edge; out of it is negative", Example: `"flux_m2_per_d": 0.08`},
	{Name: "conductance", Class: Parameter, Kind: Conductivity, Bound: "> 0", Required: "for head_dependent", Meaning: "exchange per length of edge and difference of head", Example: `"conductance_m_per_d": 0.5`},
	{Name: "saline", Class: Flag, Meaning: "salt water stands here; the level is then equivalent freshwater head", Example: `"saline": true`},
	availableField,
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 36`},
}, commonFields)}

// edgeKindWords lists the kinds of edge.
func edgeKindWords() []string {
	return []string{aquifer.PrescribedHead.String(), aquifer.PrescribedFlux.String(), aquifer.HeadDependent.String()}
}

var zonesSection = Section{Name: "zones", Title: "Layer zones", About: "Polygons. Where they overlap the later one wins, property by property, and each overlap that changes a value is reported.",
	Fields: with([]Field{nameField}, propertyFields, commonFields)}

var riversSection = Section{Name: "rivers", Title: "Layer rivers", About: "Lines within the extent.", Fields: with([]Field{nameField,
	{Name: "water_level", Class: Level, Kind: Length, Required: "one of water_level and water_levels", Meaning: "level along the whole river", Example: `"water_level_m": 21.3`},
	{Name: "water_levels", Class: Levels, Kind: Length, Meaning: "one level a vertex, linear between them", Example: `"water_levels_m": [22.0, 20.5]`},
	{Name: "bed_level", Class: Level, Kind: Length, Meaning: "bottom of the bed along the whole river", Example: `"bed_level_m": 20.1`},
	{Name: "bed_levels", Class: Levels, Kind: Length, Meaning: "one a vertex", Example: `"bed_levels_m": [21.0, 19.4]`},
	{Name: "width", Class: Number, Kind: Length, Bound: "> 0", Required: "yes", Usual: [2]float64{0.1, 3000}, UsualWhy: "is the unit right?", Meaning: "of the wetted bed", Example: `"width_m": 6`},
}, bedFields, []Field{availableField,
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 36`},
}, commonFields)}

var lakesSection = Section{Name: "lakes", Title: "Layer lakes", About: "Polygons within the extent.", Fields: with([]Field{nameField,
	{Name: "water_level", Class: Level, Kind: Length, Required: "yes", Meaning: "level of the lake", Example: `"water_level_m": 18.2`},
	{Name: "bed_level", Class: Level, Kind: Length, Meaning: "bottom of the lake", Example: `"bed_level_m": 14`},
}, bedFields, []Field{availableField,
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 36`},
}, commonFields)}

var springsSection = Section{Name: "springs", Title: "Layer springs", About: "Points within the extent.", Fields: with([]Field{nameField,
	{Name: "outlet_level", Class: Level, Kind: Length, Required: "yes", Meaning: "below this head the spring is dry", Example: `"outlet_level_m": 26.4`},
	{Name: "conductance", Class: Parameter, Kind: Conductance, Bound: "> 0", Required: "one of conductance and measured_flow", Meaning: "outflow per head above the outlet", Example: `"conductance_m2_per_d": 350`},
	{Name: "measured_flow", Class: Number, Kind: Rate, Bound: "> 0", Meaning: "flow under present pumping, from which the conductance is found", Example: `"measured_flow_L_per_s": 9`},
	{Name: "effective_radius", Class: Number, Kind: Length, Bound: "> 0", Required: "yes", Usual: [2]float64{0.1, 200}, UsualWhy: "is the unit right?",
		Meaning: "radius of the circle on which the aquifer's head drives the outflow", Example: `"effective_radius_m": 2`},
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 36`},
}, commonFields)}

var usualRadius = [2]float64{0.01, 1}

var wellsSection = Section{Name: "wells", Title: "Layer or table wells", About: "Points within the extent, or rows with a place; rows without a place add to the layer's wells by id.", Fields: with([]Field{
	{Name: "id", Class: Identity, Required: "yes", Meaning: "1 to 40 of letters, digits, _ . -; unique", Example: `"id": "W4"`},
	{Name: "name", Class: Text, Meaning: "free text", Example: `"name": "Dune well 4"`},
	{Name: "owner", Class: Text, Meaning: "who pumps", Example: `"owner": "Marram Water"`},
	{Name: "aquifer", Class: Text, Meaning: "aquifer that the screen is in", Example: `"aquifer": "lower sand"`},
	{Name: "radius", Class: Number, Kind: Length, Bound: "> 0", Usual: usualRadius, UsualWhy: "is the unit right?", Required: "yes, or diameter", Meaning: "of the bore at the screen", Example: `"radius_m": 0.2`},
	{Name: "diameter", Class: Number, Kind: Length, Bound: "> 0", Usual: [2]float64{2 * usualRadius[0], 2 * usualRadius[1]}, UsualWhy: "is the unit right?", Meaning: "in place of radius", Example: `"diameter_mm": 400`},
	{Name: "mode", Class: Word, Words: wellModeWords(), Meaning: "who sets the rate; left out: decided, or fixed for an existing user", Example: `"mode": "decided"`},
	{Name: "others", Class: Flag, Meaning: "an existing user's well, not the applicant's", Example: `"others": true`},
	{Name: "present", Class: Number, Kind: Rate, Meaning: "present rate", Example: `"present_m3_per_d": 900`},
	{Name: "recent", Class: Number, Kind: Rate, Meaning: "recent actual rate", Example: `"recent_m3_per_yr": 310000`},
	{Name: "licensed", Class: Number, Kind: Rate, Meaning: "licensed rate", Example: `"licensed_ML_per_yr": 400`},
	{Name: "requested", Class: Number, Kind: Rate, Meaning: "requested rate", Example: `"requested_L_per_s": 14`},
	{Name: "fixed_rate", Class: Number, Kind: Rate, Required: "for a fixed well, unless an existing user's licensed rate is known", Meaning: "rate of a fixed well; left out for an existing user: the licensed rate", Example: `"fixed_rate_m3_per_d": 650`},
	{Name: "min", Class: Number, Kind: Rate, Meaning: "least rate of a well that runs; the plan lets the well stand still or run at this at least; left out: none", Example: `"min_L_per_s": 4`},
	{Name: "max", Class: Number, Kind: Rate, Required: "for a decided well", Meaning: "largest daily mean rate", Example: `"max_L_per_s": 18`},
	{Name: "duty_hours", Class: Number, Kind: Plain, Bound: "> 0", Meaning: "hours a day that the pump runs; left out: 24", Example: `"duty_hours": 20`},
	{Name: "outage", Class: Flag, Meaning: "out of service", Example: `"outage": false`},
	{Name: "intake", Class: Level, Kind: Length, Meaning: "level of the pump intake", Example: `"intake_depth_below_casing_top_m": 28`},
	{Name: "lowest_level", Class: Level, Kind: Length, Meaning: "lowest allowed pumping level", Example: `"lowest_level_m": 4.5`},
	{Name: "lowest_level_reason", Class: Text, Required: "with lowest_level", Meaning: "why no lower", Example: `"lowest_level_reason": "2 m above the intake"`},
	{Name: "linear_loss", Class: Number, Kind: LinearLoss, Bound: ">= 0", Meaning: "B, beyond the aquifer's own; left out: none", Example: `"linear_loss_d_per_m2": 1e-4`},
	{Name: "quadratic_loss", Class: Number, Kind: QuadraticLoss, Bound: ">= 0", Meaning: "C, turbulent; left out: none", Example: `"quadratic_loss_min2_per_m5": 0.9`},
	{Name: "pump_efficiency", Class: Number, Kind: Share, Bound: "> 0", Usual: [2]float64{0.2, 0.9}, UsualWhy: "is this the efficiency from wire to water?", Meaning: "wire to water", Example: `"pump_efficiency_percent": 62`},
	{Name: "delivery_level", Class: Level, Kind: Length, Meaning: "level that the water is lifted to", Example: `"delivery_level_m": 55`},
	{Name: "casing_top", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the casing's top", Example: `"casing_top_m": 33.2`},
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 32.9`},
}, placeFields, commonFields)}

// wellModeWords lists the modes of a well.
func wellModeWords() []string {
	return []string{wells.Decided.String(), wells.Fixed.String(), wells.Off.String()}
}

var receptorsSection = Section{Name: "receptors", Title: "Layer or table receptors", About: "point and neighbour_well are points; wetland and wetland_worst polygons; river_reach a line along the river, " +
	"or a row without a place for the whole river; saline_front a line of two points from inland towards the salt water; spring, edge_flow and pumping_level need only `feature`. " +
	"A receptor outside the extent is listed as such and not assessed.", Fields: with([]Field{
	{Name: "id", Class: Identity, Required: "yes", Meaning: "1 to 40 of letters, digits, _ . -; unique", Example: `"id": "R2"`},
	{Name: "name", Class: Text, Meaning: "free text", Example: `"name": "Reedy Hollow"`},
	{Name: "kind", Class: Word, Words: wells.KindWords(), Required: "yes", Meaning: "which quantity is watched", Example: `"kind": "wetland"`},
	{Name: "feature", Class: Text, Required: "for spring, river_reach, edge_flow and pumping_level", Meaning: "name of the spring, river or edge, or id of the well", Example: `"feature": "Sandwater"`},
	{Name: "use", Class: Text, Meaning: "what it is used for", Example: `"use": "farm supply"`},
	{Name: "owner", Class: Text, Meaning: "whose it is", Example: `"owner": "Ness Farm"`},
	{Name: "date", Class: Text, Meaning: "of the survey", Example: `"date": "2024-05-02"`},
	{Name: "field_checked", Class: Flag, Meaning: "seen in the field, not only in a register", Example: `"field_checked": true`},
}, placeFields, commonFields)}

var observationsSection = Section{Name: "observations", Title: "Layer or table observations", About: "Compared with the state under present pumping.", Fields: with([]Field{
	{Name: "id", Class: Identity, Required: "yes", Meaning: "1 to 40 of letters, digits, _ . -; unique", Example: `"id": "P7"`},
	{Name: "kind", Class: Word, Words: []string{wells.PointLevel.String(), wells.SpringFlow.String(), wells.RiverReach.String()}, Required: "yes", Meaning: "point: a level; spring and river_reach: a flow", Example: `"kind": "point"`},
	{Name: "feature", Class: Text, Required: "for a flow", Meaning: "name of the spring or river", Example: `"feature": "Sandwater"`},
	{Name: "level", Class: Level, Kind: Length, Required: "for a point", Meaning: "measured level", Example: `"level_m": 24.15`},
	{Name: "flow", Class: Number, Kind: Rate, Required: "for a spring or river", Meaning: "measured flow out of the aquifer", Example: `"flow_L_per_s": 8.7`},
	{Name: "date", Class: Text, Meaning: "of the measurement", Example: `"date": "2024-05-02"`},
	{Name: "casing_top", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the casing's top", Example: `"casing_top_m": 33.2`},
	{Name: "ground_level", Class: Level, Kind: Length, Required: "where a depth counts from it", Meaning: "elevation of the ground", Example: `"ground_level_m": 32.9`},
}, placeFields, commonFields)}

var limitsSection = Section{Name: "limits", Title: "Table limits", About: "One row a limit; a receptor carries any number of them.", Fields: with([]Field{
	{Name: "id", Class: Identity, Required: "yes", Meaning: "1 to 40 of letters, digits, _ . -; unique", Example: `L3`},
	{Name: "receptor", Class: Identity, Required: "yes", Meaning: "id of the receptor", Example: `R2`},
	{Name: "quantity", Class: Word, Words: []string{wells.Change.String(), wells.Value.String(), wells.ShareOfBase.String()}, Required: "yes",
		Meaning: "change: fall against the baseline; value: the quantity itself; share_of_base: change as a share of the undisturbed value", Example: `change`},
	{Name: "sense", Class: Word, Words: []string{wells.AtMost.String(), wells.AtLeast.String()}, Required: "yes", Meaning: "direction", Example: `at_most`},
	{Name: "value", Class: Number, Kind: LimitValue, Required: "yes", Meaning: "with a unit that fits the receptor: a length for levels and drawdowns, a rate for flows, -, % or 1/1000 for gradients and shares", Example: `0.15 m`},
	{Name: "unit", Class: Text, Required: "unless value carries it", Meaning: "unit of value", Example: `m`},
	{Name: "baseline", Class: Word, Words: []string{wells.NoPumping.String(), wells.PresentPumping.String(), wells.OthersAtLicence.String()}, Meaning: "what a change counts from; left out: no_pumping", Example: `no_pumping`},
	{Name: "counts", Class: Word, Words: []string{wells.Cumulative.String(), wells.Own.String()}, Meaning: "whose pumping counts; left out: cumulative", Example: `cumulative`},
	{Name: "state", Class: Text, Meaning: "operating state in which it must hold; left out: every one", Example: `drought`},
	{Name: "reserve", Class: Number, Kind: Share, Bound: ">= 0", Meaning: "share of the room kept back; left out: none", Example: `10 %`},
	{Name: "date", Class: Text, Meaning: "of the source", Example: `2023-01-10`},
}, commonFields)}

var licencesSection = Section{Name: "licences", Title: "Table licences", About: "One row a licence.", Fields: with([]Field{
	{Name: "id", Class: Identity, Required: "yes", Meaning: "1 to 40 of letters, digits, _ . -; unique", Example: `A-17`},
	{Name: "holder", Class: Text, Meaning: "who holds it", Example: `Marram Water`},
	{Name: "purpose", Class: Text, Meaning: "use of the water", Example: `public supply`},
	{Name: "wells", Class: IDList, Required: "yes", Meaning: "ids of its wells", Example: `W1; W2`},
	{Name: "per_hour", Class: Number, Kind: HourVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in an hour", Example: `180 m3`},
	{Name: "per_day", Class: Number, Kind: DayVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in a day", Example: `3600 m3`},
	{Name: "per_year", Class: Number, Kind: YearVolume, Bound: ">= 0", Required: "one of the three", Meaning: "most water in a year", Example: `1100 ML`},
	{Name: "start_day", Class: Text, Meaning: "first day of the licence's year, as MM-DD", Example: `06-01`},
	{Name: "months", Class: Text, Meaning: "months of use, 1 to 12, as a list or a range: its wells pump only in operating states that cover no other month; left out: the whole year", Example: `5-9`},
}, commonFields)}

var statesSection = Section{Name: "states", Title: "Table states", About: "One row an operating state. All are steady states. Several are planned together, with a rate for each well in each of them.", Fields: with([]Field{
	{Name: "name", Class: Text, Required: "yes", Meaning: "unique", Example: `drought`},
	{Name: "default", Class: Flag, Required: "on one row, unless there is only one", Meaning: "the state that the main tables of the results show", Example: `yes`},
	{Name: "demand", Class: Number, Kind: Rate, Bound: ">= 0", Required: "with most-headroom, least-energy, unless the brief has it", Meaning: "total that the decided wells must give in it; left out: none", Example: `75 L/s`},
	{Name: "recharge_factor", Class: Number, Kind: Plain, Bound: ">= 0", Meaning: "multiplies every recharge; left out: 1", Example: `0.6`},
	{Name: "days", Class: Number, Kind: Plain, Bound: ">= 0", Required: "on every row beside yearly quantities", Meaning: "days a year that it lasts; those of all states make a year", Example: `40`},
	{Name: "months", Class: Text, Meaning: "calendar months that it covers, 1 to 12, as a list or a range, against which licences' months of use are held", Example: `6-8`},
}, commonFields)}
