// Package workbook writes a plan's report as a spreadsheet that leaves the house: a licensed reviewer who never saw the program
// can read it, print it, follow every number and try other rates.
//
// Question answered: how does a reviewer check a pumping plan line by line, and what happens at other rates?
//
// The sheets, in the reviewer's order: Read me first, Plan, Receptors, Contributions, Sensitivities, Capture, Inputs and
// assumptions, Checks. The rates to edit stand on Plan beside the planned ones. From them, by formulas,
//
//	running rate  = rate x 24 / duty hours
//	well loss     = B Q_run + C Q_run |Q_run|                            (Jacob 1947, Trans. AGU 28)
//	pumping level = static level - sum_j D_j Q_j - own drawdown per rate x Q - well loss
//	change        = sum_w S_w Q_w                                        one SUMPRODUCT down the wells
//	limited change = change of the counted wells - the same sum at the baseline's rates
//	headroom      = limit - quantity, in the limit's own direction
//	hand check    = Q ln(r2/r1) / (2 pi T)                               (Thiem 1906)
//
// Method: every formula is built together with its value (see term), in the same order of operations, and both are stored, so that
// each viewer shows numbers and a recalculation gives the same ones. Values are stored in full (15 figures, the format's limit);
// the display follows the data.
//
// Symbols, units, signs: Q rate [m³/d], pumping positive; S sensitivity in the receptor's unit per m³/d; D drawdown per rate
// [d/m²], positive downward; changes grow with pumping.
//
// WriteEvidence writes the record of an audit as a workbook of its own, with one sheet that prints.
//
// Assumptions and what is not done: prices, capture shares, the worst place of a receptor and all checks belong to the planned
// rates and do not follow an edit; every sheet says so as soon as a rate is changed. Sheet protection guards against slips only.
package workbook
