// Package wells holds the records of what pumps and of what must be protected: wells, licences, receptors, limits,
// operating states and observations, and the terms that belong to a well alone (losses, running rate, pumping level).
//
// Question answered: what may each well do, what must stay inside which limit, and how does a rate become a level in the bore?
//
// The level in a pumped well is
//
//	level = h_node - Q/(2 pi T*) ln(r0/rw) - B Q_run - C Q_run²        (Jacob 1947, Trans. AGU 28)
//
// with Q the daily mean rate (the aquifer answers to the mean) and Q_run = Q x 24/duty hours the rate while the pump runs.
//
// Symbols, units, signs: Q rate [m³/d], positive when pumped out of the aquifer, negative when recharged into it;
// s drawdown [m], positive downward; B [d/m²] and C [d²/m⁵] the losses beyond the aquifer's own.
//
// Inside, everything is metre and day; conversion happens where files are read and written. A value that the user left
// blank is a nil pointer: unknown is never zero. Not done here: anything about the aquifer between the wells.
package wells
