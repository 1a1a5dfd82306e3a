package gisio

import (
	"fmt"
	"strings"
)

// Class says how a key's value is written.
type Class int

// The classes of value.
const (
	Text      Class = iota // free text
	Word                   // one of the listed words
	Number                 // a number of the field's kind
	Parameter              // the same, with _low, _high, _basis and _source beside it
	Level                  // an elevation in the vertical datum, or a depth below a named reference
	Levels                 // a list of elevations, one a vertex
	Flag                   // true or false
	Whole                  // a whole number
	Identity               // an id
	IDList                 // ids, separated by semicolons, commas or blanks
	FileName               // a file, relative to the project file, or a table with file and its settings
)

// Field is one key of the project file, one property of a feature or one column of a table.
type Field struct {
	Name     string
	Class    Class
	Kind     Kind     // of Number, Parameter, Level and Levels
	Words    []string // of Word
	Required string   // "yes", a condition in words, or empty
	Bound    string   // "> 0", ">= 0" or empty
	Usual    [2]float64
	UsualWhy string // what a value outside the usual range suggests; empty: no usual range
	Meaning  string
	Example  string // key and value as they are written
}

// Section is a table of the project file, a layer's properties or a table's columns.
type Section struct {
	Name   string // "aquifer", "wells"
	Title  string // as the reference page heads it
	About  string
	Fields []Field
}

// role is the part that a key plays for its field.
type role int

const (
	valueRole  role = iota // the value itself
	lowRole                // lower end of the stated range
	highRole               // upper end
	basisRole              // measured, estimated or assumed
	sourceRole             // where the value comes from
	depthRole              // a depth below a named reference, for a level
)

// resolved is what a key stands for.
type resolved struct {
	field     *Field
	role      role
	unit      *Unit  // named in the key or for the column; nil: to be written with the value
	reference string // depthRole: field that holds the reference's level
}

// depthMark stands between a level's name and its reference in a key.
const depthMark = "_depth_below_"

// levelReferences are the fields that a depth may count from.
var levelReferences = []string{"casing_top", "ground_level"}

// numeric tells whether a value of the class is a number with a kind.
func (c Class) numeric() bool { return c == Number || c == Parameter || c == Level || c == Levels }

// field returns the section's field of that name, or nil.
func (s *Section) field(name string) *Field {
	for i := range s.Fields {
		if s.Fields[i].Name == name {
			return &s.Fields[i]
		}
	}
	return nil
}

// resolve finds what a key stands for: a field's name, alone or followed by _low, _high, _basis, _source, a unit word, or, for
// levels, by _depth_below_ and a reference.
func (s *Section) resolve(key string) (resolved, bool) {
	if f := s.field(key); f != nil {
		return resolved{field: f}, true
	}
	for i := range s.Fields {
		f := &s.Fields[i]
		rest, ok := strings.CutPrefix(key, f.Name+"_")
		if !ok || !f.Class.numeric() {
			continue
		}
		if r, ok := f.resolveRest(rest); ok {
			return r, true
		}
	}
	return resolved{}, false
}

// resolveRest reads what follows a numeric field's name in a key.
func (f *Field) resolveRest(rest string) (resolved, bool) {
	switch rest {
	case "basis":
		return resolved{field: f, role: basisRole}, true
	case "source":
		return resolved{field: f, role: sourceRole}, true
	}
	r := resolved{field: f}
	if f.Class == Parameter {
		if after, ok := strings.CutPrefix(rest, "low"); ok {
			r.role, rest = lowRole, after
		} else if after, ok := strings.CutPrefix(rest, "high"); ok {
			r.role, rest = highRole, after
		}
		if r.role != valueRole {
			if rest == "" {
				return r, true
			}
			if !strings.HasPrefix(rest, "_") {
				return resolved{}, false
			}
			rest = rest[1:]
		}
	}
	if f.Class == Level {
		if after, ok := strings.CutPrefix("_"+rest, depthMark); ok {
			return f.resolveDepth(after)
		}
	}
	if u, ok := unitByWord(rest, f.Kind); ok {
		r.unit = &u
		return r, true
	}
	return resolved{}, false
}

// resolveDepth reads the reference, and the unit where there is one, behind a level's depth mark.
func (f *Field) resolveDepth(after string) (resolved, bool) {
	for _, ref := range levelReferences {
		r := resolved{field: f, role: depthRole, reference: ref}
		if after == ref {
			return r, true
		}
		if word, ok := strings.CutPrefix(after, ref+"_"); ok {
			if u, ok := unitByWord(word, Length); ok {
				r.unit = &u
				return r, true
			}
		}
	}
	return resolved{}, false
}

// keysOf lists ways to write a field's key, for messages: at most a handful.
func (f *Field) keysOf() string {
	const shown = 4 // enough to see the scheme
	if !f.Class.numeric() || len(Units(f.Kind)) == 0 {
		return f.Name
	}
	var keys []string
	for i, u := range Units(f.Kind) {
		if i == shown {
			keys = append(keys, "...")
			break
		}
		keys = append(keys, f.Name+"_"+u.Word)
	}
	return strings.Join(keys, ", ")
}

// names lists the section's field names.
func (s *Section) names() []string {
	names := make([]string, len(s.Fields))
	for i, f := range s.Fields {
		names[i] = f.Name
	}
	return names
}

// nearestKey returns the known key nearest to an unknown one, with the unit word kept where the rest of the key has one; empty
// when none is near.
func (s *Section) nearestKey(key string) string {
	var known []string
	for i := range s.Fields {
		f := &s.Fields[i]
		known = append(known, f.Name)
		if f.Class.numeric() {
			for _, u := range Units(f.Kind) {
				known = append(known, f.Name+"_"+u.Word)
			}
			known = append(known, f.Name+"_basis", f.Name+"_source")
		}
		if f.Class == Parameter {
			known = append(known, f.Name+"_low", f.Name+"_high")
		}
	}
	return nearest(key, known)
}

var classWords = [...]string{Text: "text", Word: "word", Number: "number", Parameter: "parameter", Level: "level", Levels: "list of levels",
	Flag: "true or false", Whole: "whole number", Identity: "id", IDList: "list of ids", FileName: "file"}

// ReferenceMarkdown renders every key of the project file, every property of a feature and every column of a table as Markdown.
// The reader works from the same tables.
func ReferenceMarkdown() string {
	var b strings.Builder
	b.WriteString(referenceIntroduction)
	for _, s := range sections {
		fmt.Fprintf(&b, "\n### %s\n\n%s\n\n", s.Title, s.About)
		b.WriteString("| key | value | needed | meaning | example |\n|---|---|---|---|---|\n")
		for _, f := range s.Fields {
			fmt.Fprintf(&b, "| `%s` | %s | %s | %s | `%s` |\n", f.Name, f.valueWords(), f.Required, cell(f.meaningWords()), cell(f.Example))
		}
	}
	b.WriteString("\n### Units\n\n| for | units, and the words that end a key |\n|---|---|\n")
	for k := Rate; k < LimitValue; k++ {
		var us []string
		for _, u := range unitTable[k] {
			us = append(us, fmt.Sprintf("`%s` (`_%s`)", u.Name, u.Word))
		}
		fmt.Fprintf(&b, "| %s | %s |\n", k, strings.Join(us, ", "))
	}
	return b.String()
}

// valueWords says how the field's value is written.
func (f *Field) valueWords() string {
	switch {
	case f.Class == Word:
		return "`" + strings.Join(f.Words, "`, `") + "`"
	case f.Class == Level, f.Class == Levels:
		return classWords[f.Class]
	case f.Class.numeric() && f.Kind == Plain:
		return classWords[f.Class] + " without unit" + boundWords(f.Bound)
	case f.Class.numeric():
		return classWords[f.Class] + ": " + f.Kind.String() + boundWords(f.Bound)
	}
	return classWords[f.Class]
}

// boundWords puts a bound behind a value's description.
func boundWords(bound string) string {
	if bound == "" {
		return ""
	}
	return ", " + bound
}

// meaningWords is the meaning with the usual range.
func (f *Field) meaningWords() string {
	if f.UsualWhy == "" {
		return f.Meaning
	}
	in := Inside(f.Kind)
	return fmt.Sprintf("%s; usual %s to %s", f.Meaning, in.Format(f.Usual[0]), in.Format(f.Usual[1]))
}

// cell makes a text safe inside a Markdown table.
func cell(s string) string { return strings.ReplaceAll(s, "|", "\\|") }

const referenceIntroduction = `Every value that has a unit is written with it (` + "`\"18 L/s\"`" + `) or under a key that ends in the unit's word
(` + "`max_L_per_s`" + `); a bare number is refused where its unit could be doubted. The same holds in the project file, in features and in tables, where
a unit may also stand in square brackets behind a header, in a row of units below the headers, or in ` + "`[columns]`" + `.

A *parameter* may carry its stated range and where it comes from: ` + "`transmissivity_low`, `transmissivity_high`, `transmissivity_basis`" + `
(measured, estimated or assumed) and ` + "`transmissivity_source`" + `; units as for the value itself. Any number may carry ` + "`_basis` and `_source`" + `.

A *level* is an elevation in the vertical datum (` + "`intake_m`" + `), or a depth below a named reference whose own elevation is given
(` + "`intake_depth_below_casing_top_m`" + ` with ` + "`casing_top_m`" + `, or below ` + "`ground_level`" + `). A third coordinate is never a level. A blank is unknown, never zero.
`
