package gisio

import "strings"

// unitSpellings are further spellings of units that cannot be mistaken, after plainUnit.
var unitSpellings = map[string]string{
	"Ml/d": "ML/d", "Ml/yr": "ML/yr", "Ml": "ML", "m3pd": "m3/d", "acre-ft/yr": "acre_ft/yr", "ac-ft/yr": "acre_ft/yr",
	"acre-ft": "acre_ft", "ac-ft": "acre_ft", "US gpm": "gpm_us", "us gpm": "gpm_us", "gpm (US)": "gpm_us", "imp gpm": "gpm_imp", "Imp gpm": "gpm_imp",
	"gpm (imp)": "gpm_imp", "US mgd": "mgd_us", "mgd (US)": "mgd_us", "meters": "m", "metres": "m", "metre": "m", "meter": "m", "feet": "ft",
	"inch": "in", "inches": "in", "d2/m5": "d2/m5", "1": "-", "m/m": "-", "percent": "%", "‰": "1/1000", "per mille": "1/1000",
}

// doubtfulUnits are texts that stand for more than one unit, and what to write in their place.
var doubtfulUnits = map[string]string{
	"gpm": "gpm_us or gpm_imp", "GPM": "gpm_us or gpm_imp", "gal/min": "gpm_us or gpm_imp", "gpd": "gpm_us, gpm_imp or m3/d", "gal": "US or imperial gallons",
	"gal/d": "US or imperial gallons", "MG": "US or imperial gallons", "MGD": "mgd_us, or m3/d where imperial gallons are meant", "mgd": "mgd_us, or m3/d where imperial gallons are meant",
	"MG/d": "mgd_us, or m3/d where imperial gallons are meant", "gpd/ft": "gpd_us/ft", "ml/d": "ML/d for megalitres", "ml/yr": "ML/yr for megalitres",
	"M3/d": "m3/d, or Mm3/yr for millions", "ft/gpm": "ft/gpm_us", "gpm/ft": "gpm_us/ft",
}

var timeWords = map[string]string{
	"day": "d", "days": "d", "hour": "h", "hours": "h", "hr": "h", "minute": "min", "minutes": "min", "sec": "s", "second": "s", "seconds": "s",
	"year": "yr", "years": "yr", "a": "yr", "y": "yr",
}

var superscripts = strings.NewReplacer("²", "2", "³", "3", "⁵", "5", "^", "", "ℓ", "L", " / ", "/", " per ", "/", "·", "", "\u00a0", " ")

// plainUnit brings a unit's text to one spelling: digits for superscripts, "/" for "per", short words for times, L for litres.
func plainUnit(text string) string {
	s := superscripts.Replace(strings.TrimSpace(text))
	parts := strings.Split(s, "/")
	for i, p := range parts {
		p = strings.TrimSpace(p)
		if t, ok := timeWords[p]; ok && (i > 0 || len(p) > 1) {
			p = t
		}
		switch p {
		case "l", "litre", "litres", "liter", "liters":
			p = "L"
		case "kl":
			p = "kL"
		}
		parts[i] = p
	}
	return strings.Join(parts, "/")
}

// FindUnit finds a unit of the kind by its name, its key word or a spelling that cannot be mistaken. The error, a
// *QuantityError, says whether the text is another kind's unit, stands for two units, or is no unit at all.
func FindUnit(text string, kind Kind) (Unit, error) {
	name := plainUnit(text)
	if to, ok := unitSpellings[name]; ok {
		name = to
	}
	for _, u := range Units(kind) {
		if u.Name == name || u.Word == name {
			return u, nil
		}
	}
	if hint, ok := doubtfulUnits[name]; ok {
		return Unit{}, &QuantityError{"in the unit " + quoted(text) + ", which can mean more than one", quantityAllowed(kind), "write " + hint}
	}
	if kinds := kindsOf(name); len(kinds) > 0 {
		return Unit{}, &QuantityError{"in the unit " + quoted(text) + ", which is for " + orList(kinds), quantityAllowed(kind), ""}
	}
	return Unit{}, &QuantityError{"in the unknown unit " + quoted(text), quantityAllowed(kind), nearestHint(text, unitNameList(kind))}
}

// kindsOf lists the kinds that have a unit of that name or word.
func kindsOf(name string) []string {
	var kinds []string
	for k := Rate; k < LimitValue; k++ {
		for _, u := range unitTable[k] {
			if u.Name == name || u.Word == name {
				kinds = append(kinds, k.String())
				break
			}
		}
	}
	return kinds
}

// unitNameList lists the names of the kind's units.
func unitNameList(kind Kind) []string {
	var names []string
	for _, u := range Units(kind) {
		names = append(names, u.Name)
	}
	return names
}

// unitByWord finds a unit of the kind by the word that ends a key.
func unitByWord(word string, kind Kind) (Unit, bool) {
	for _, u := range Units(kind) {
		if u.Word == word {
			return u, true
		}
	}
	return Unit{}, false
}

// nearestHint gives "did you mean X?" where one of the words is near enough to the text, else nothing.
func nearestHint(text string, words []string) string {
	if w := nearest(text, words); w != "" {
		return "did you mean " + w + "?"
	}
	return ""
}

// nearest returns the word with the smallest edit distance to the text, the first of equals, where that distance is at most
// a third of the word's length and at least one; otherwise an empty text.
func nearest(text string, words []string) string {
	best, bestDistance := "", 1<<30
	a := strings.ToLower(text)
	for _, w := range words {
		d := editDistance(a, strings.ToLower(w))
		if limit := max(1, (len(w)+1)/3); d <= limit && d < bestDistance {
			best, bestDistance = w, d
		}
	}
	return best
}

// editDistance counts the insertions, deletions, replacements and swaps of neighbours that turn a into b (Damerau 1964,
// restricted to one edit a place).
func editDistance(a, b string) int {
	const longest = 200 // longer texts are no typing slips
	x, y := []rune(a), []rune(b)
	if len(x) > longest || len(y) > longest {
		return longest
	}
	rows := make([][]int, len(x)+1)
	for i := range rows {
		rows[i] = make([]int, len(y)+1)
		rows[i][0] = i
	}
	for j := range rows[0] {
		rows[0][j] = j
	}
	for i := 1; i <= len(x); i++ {
		for j := 1; j <= len(y); j++ {
			cost := 1
			if x[i-1] == y[j-1] {
				cost = 0
			}
			rows[i][j] = min(rows[i-1][j]+1, rows[i][j-1]+1, rows[i-1][j-1]+cost)
			if i > 1 && j > 1 && x[i-1] == y[j-2] && x[i-2] == y[j-1] {
				rows[i][j] = min(rows[i][j], rows[i-2][j-2]+1)
			}
		}
	}
	return rows[len(x)][len(y)]
}
